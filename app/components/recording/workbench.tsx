import { type ReactNode, useCallback, useEffect, useMemo, useRef, useState } from "react";
import { OverviewStrip, type StripWindow } from "#app/charts/overview-strip.tsx";
import { useWidth } from "#app/charts/use-width.ts";
import type { Edge } from "#app/charts/window-edges.tsx";
import { Button } from "#app/components/button.tsx";
import { Empty } from "#app/components/empty.tsx";
import { type SavedWindow, windowsDocumentOf } from "#app/domain/fit.ts";
import { countOf, formatNumber } from "#app/domain/quantity.ts";
import {
  addByHand,
  applyTrimToAll,
  editToRedo,
  editToUndo,
  redo,
  setAside,
  takeBack,
  trim,
  undo,
} from "#app/domain/window.ts";
import type {
  OpenedRecording,
  Protocol,
  Result,
  StretchRequest,
  WindowChoice,
  WindowDrawing,
} from "#app/engine/types.ts";
import { AddWindowDialog } from "./add-window-dialog.tsx";
import { FlagSummary } from "./flag-summary.tsx";
import { type KeyLine, KeysDialog } from "./keys-dialog.tsx";
import { ResidualList } from "./residual-list.tsx";
import { SetAsideDialog } from "./set-aside-dialog.tsx";
import { TraceArea, type TraceAreaHandle } from "./trace-area.tsx";
import { TraceTable } from "./trace-table.tsx";
import { type OneState, TwoStates } from "./two-states.tsx";
import type { Edits } from "./use-edits.ts";
import { type EnginePort, useFits, useFollow, useStretch } from "./use-following.ts";
import { useKeys, useSingleKeys } from "./use-keys.ts";
import { panned, rangeOf, showing, type View, windowView, zoomed } from "./view.ts";
import { WindowDrawer } from "./window-drawer.tsx";
import { axisFlags } from "./words.ts";

const EDITING_KEYS: readonly KeyLine[] = [
  { keys: ["←", "→"], what: "previous, next window" },
  { keys: ["[", "]"], what: "go to the window’s start, end" },
  { keys: ["←", "→"], what: "there: trim by one sample (Shift, Page up, Page down: ten)" },
  { keys: ["X"], what: "set the window aside, or take it back" },
  { keys: ["O"], what: "start the window at its onset" },
  { keys: ["T"], what: "use this trim for all windows of the axis" },
  { keys: ["A"], what: "add a window by hand, at the cursor" },
  { keys: [",", "."], what: "move the cursor by one sample (Shift: ten)" },
  { keys: ["+", "−"], what: "zoom in, out" },
  { keys: ["0"], what: "back to the chosen window" },
  { keys: ["R"], what: "the whole recording" },
  { keys: ["1", "2"], what: "first, second axis" },
  { keys: ["V"], what: "show the traces as a table" },
  { keys: ["Z"], what: "undo (Shift: redo)" },
  { keys: ["S"], what: "save" },
  { keys: ["?"], what: "this list" },
];
const ONLY_EDITING = new Set(["[", "X", "O", "T", "A", "Z", "S"]);
const READING_KEYS = EDITING_KEYS.filter(
  ({ keys, what }) => !ONLY_EDITING.has(keys[0] ?? "") && !what.startsWith("there"),
);

const NEAR_STEP = 1.5;
/** Wider than this the time axis is that of the recording. */
const MS_AXIS_MOST_S = 2;

/** The open recording: its traces, the chosen window and its fit, and all that is done to windows. */
export function Workbench({
  port,
  opened,
  protocol,
  axis,
  onAxis,
  edits,
  windows,
  recordingSha256,
  canEdit,
  canSave,
  isSaving,
  onSave,
  onProblem,
  head,
  foot,
  theirs,
}: {
  port: EnginePort;
  opened: OpenedRecording;
  protocol: Protocol;
  /** The axis that is shown. */
  axis: string;
  onAxis: (axis: string) => void;
  edits: Edits;
  /** All windows of the recording as they stand. */
  windows: readonly SavedWindow[];
  recordingSha256: string;
  canEdit: boolean;
  /** There is something that is not saved yet. */
  canSave: boolean;
  isSaving: boolean;
  onSave: (windows: readonly SavedWindow[], result: Result) => void;
  onProblem: (error: unknown) => void;
  head: ReactNode;
  foot: ReactNode;
  /** Another person's newer fit, where one's own edits were made on an older one. */
  theirs: OneState | null;
}) {
  const ofAxis = useMemo(() => windows.filter((window) => window.axis === axis), [windows, axis]);
  const [onsets, setOnsets] = useState<Readonly<Record<string, number>>>({});
  const chosenIndex = Math.max(
    0,
    ofAxis.findIndex((window) => window.onset_s === onsets[axis]),
  );
  const chosen = ofAxis[chosenIndex] ?? null;
  const number = chosenIndex + 1;

  const [moving, setMoving] = useState<{ onsetS: number; windowMs: [number, number] } | null>(null);
  const windowMs = moving?.windowMs ?? chosen?.window_ms ?? null;
  const [drawing, setDrawing] = useState<WindowDrawing | null>(null);
  const [cursorS, setCursorS] = useState<number | null>(null);
  const [view, setView] = useState<View>(() =>
    windowView(protocol.baseline_ms, protocol.window_ms),
  );
  const [dialog, setDialog] = useState<"set aside" | "add" | "keys" | null>(null);
  const [asTable, setAsTable] = useState(false);
  const [singleKeys, setSingleKeys] = useSingleKeys();
  const area = useRef<TraceAreaHandle>(null);
  const [box, width] = useWidth<HTMLDivElement>(760);

  const whole = useMemo(() => ({ fromS: opened.startS, toS: opened.endS }), [opened]);
  const onsetS = chosen?.onset_s ?? null;
  const range = useMemo(() => rangeOf(view, onsetS, whole), [view, onsetS, whole]);
  const originS = onsetS !== null && range.toS - range.fromS <= MS_AXIS_MOST_S ? onsetS : null;
  const sampleMs = 1000 / opened.rateHz;

  const document = useMemo(
    () => windowsDocumentOf(recordingSha256, windows),
    [recordingSha256, windows],
  );
  const fits = useFits(port, document, onProblem);
  const stretchRequest = useMemo<StretchRequest>(
    () => ({ axis, ...range, pixels: width }),
    [axis, range, width],
  );
  const stretch = useStretch(port, stretchRequest, onProblem);
  const overviewRequest = useMemo<StretchRequest>(
    () => ({ axis, ...whole, pixels: 600 }),
    [axis, whole],
  );
  const overview = useStretch(port, overviewRequest, onProblem);

  // ---- the fit that follows the hand
  const chosenKey = useRef<{ axis: string; onsetS: number | null }>({ axis, onsetS });
  chosenKey.current = { axis, onsetS };
  const follow = useFollow(
    port,
    (next, { choice, eventTime }) => {
      if (choice.axis !== chosenKey.current.axis || choice.onset_s !== chosenKey.current.onsetS) {
        return;
      }
      area.current?.show(next);
      if (eventTime !== null) {
        // The canvas is painted in a microtask of this turn; this one comes after it.
        queueMicrotask(() => noteDrawn(eventTime));
      }
      setDrawing(next);
    },
    onProblem,
  );
  useEffect(() => {
    if (chosen === null) return;
    follow({ choice: choiceOf(chosen), choices: ofAxis, pixels: width, eventTime: null });
  }, [follow, chosen, ofAxis, width]);

  function moveEdge(edge: Edge, ms: number, eventTime: number) {
    if (chosen === null || windowMs === null) return;
    const next: [number, number] = edge === "start" ? [ms, windowMs[1]] : [windowMs[0], ms];
    setMoving({ onsetS: chosen.onset_s, windowMs: next });
    follow({
      choice: { ...choiceOf(chosen), window_ms: next },
      choices: ofAxis,
      pixels: width,
      eventTime,
    });
  }
  function edgeDone() {
    if (moving === null) return;
    const { onsetS: at, windowMs: trimmed } = moving;
    setMoving(null);
    edits.change((list) => trim(list, { axis, onset_s: at }, trimmed));
  }

  // ---- what else can be done
  const choose = useCallback(
    (index: number) => {
      const next = ofAxis[Math.min(Math.max(index, 0), ofAxis.length - 1)];
      if (next === undefined) return;
      setOnsets((held) => ({ ...held, [axis]: next.onset_s }));
      setView((held) => showing(held, next.onset_s, whole));
    },
    [ofAxis, axis, whole],
  );
  const zoom = (factor: number, aboutS: number) =>
    setView((held) => zoomed(held, onsetS, whole, factor, aboutS));
  const middleS = onsetS ?? (range.fromS + range.toS) / 2;
  const edit = (change: Parameters<Edits["change"]>[0]) => {
    if (canEdit) edits.change(change);
  };
  const key = chosen === null ? null : { axis, onset_s: chosen.onset_s };
  const canSnap = chosen !== null && chosen.window_ms[0] !== 0;
  const canUseForAll =
    chosen !== null && ofAxis.some((window) => !sameSpan(window.window_ms, chosen.window_ms));
  const actions = {
    snap() {
      if (key === null || !canSnap || chosen === null) return;
      const end = chosen.window_ms[1] > 0 ? chosen.window_ms[1] : protocol.window_ms[1];
      edit((list) => trim(list, key, [0, end]));
    },
    aside() {
      if (key === null || chosen === null || !canEdit) return;
      if (chosen.included) setDialog("set aside");
      else edit((list) => takeBack(list, key));
    },
    useForAll() {
      if (chosen !== null && canUseForAll) {
        edit((list) => applyTrimToAll(list, axis, chosen.window_ms));
      }
    },
    undo: () => edit(undo),
    redo: () => edit(redo),
    add: () => canEdit && setDialog("add"),
    async save() {
      if (!canEdit || !canSave || isSaving || windows.length === 0) return;
      try {
        onSave(windows, fits.result ?? (await port.analyze(document)));
      } catch (error) {
        onProblem(error);
      }
    },
    near: () => setView(windowView(protocol.baseline_ms, windowMs ?? protocol.window_ms)),
    whole: () => setView({ kind: "fixed", ...whole }),
    moveCursor(samples: number) {
      area.current?.point((cursorS ?? middleS) + (samples * sampleMs) / 1000);
    },
  };
  useKeys(
    {
      arrowleft: () => choose(chosenIndex - 1),
      arrowright: () => choose(chosenIndex + 1),
      "[": () => area.current?.focus("start"),
      "]": () => area.current?.focus("end"),
      x: actions.aside,
      o: actions.snap,
      t: actions.useForAll,
      a: actions.add,
      z: actions.undo,
      "shift+z": actions.redo,
      y: actions.redo,
      s: actions.save,
      "+": () => zoom(1 / NEAR_STEP, middleS),
      "=": () => zoom(1 / NEAR_STEP, middleS),
      "-": () => zoom(NEAR_STEP, middleS),
      "−": () => zoom(NEAR_STEP, middleS),
      "0": actions.near,
      r: actions.whole,
      v: () => setAsTable((shown) => !shown),
      ",": () => actions.moveCursor(-1),
      ".": () => actions.moveCursor(1),
      "<": () => actions.moveCursor(-10),
      ">": () => actions.moveCursor(10),
      "shift+,": () => actions.moveCursor(-10),
      "shift+.": () => actions.moveCursor(10),
      "1": () => onAxis(protocol.axes[0]?.name ?? axis),
      "2": () => onAxis(protocol.axes[1]?.name ?? axis),
      "?": () => setDialog("keys"),
    },
    singleKeys,
  );

  // ---- what is shown
  const drawings = useMemo(
    () => (fits.drawings ?? []).filter(({ choice }) => choice.axis === axis),
    [fits.drawings, axis],
  );
  const otherDrawings = useMemo(
    () => drawings.flatMap(({ choice, drawing: d }) => (choice.onset_s === onsetS ? [] : [d])),
    [drawings, onsetS],
  );
  const others = useMemo(
    () =>
      ofAxis
        .filter((window) => window.onset_s !== onsetS)
        .map((window) => ({
          fromS: window.onset_s + window.window_ms[0] / 1000,
          toS: window.onset_s + window.window_ms[1] / 1000,
          aside: !window.included,
        })),
    [ofAxis, onsetS],
  );
  const directions = useMemo(
    () =>
      new Map(
        drawings.map(({ choice, drawing: d }) => [choice.onset_s, d.window.direction ?? null]),
      ),
    [drawings],
  );
  const wordsOf = useCallback(
    (window: WindowChoice) => {
      const direction = directions.get(window.onset_s);
      return [direction ? `towards ${direction}` : null, window.included ? null : "set aside"]
        .filter(Boolean)
        .join(", ");
    },
    [directions],
  );
  const strip = useMemo<StripWindow[]>(
    () =>
      ofAxis.map((window, i) => ({
        number: i + 1,
        startS: window.onset_s + window.window_ms[0] / 1000,
        endS: window.onset_s + window.window_ms[1] / 1000,
        onsetS: window.onset_s,
        aside: !window.included,
        words: wordsOf(window),
      })),
    [ofAxis, wordsOf],
  );
  const residuals = useMemo(
    () =>
      ofAxis.flatMap((window, i) => {
        const found = drawings.find(({ choice }) => choice.onset_s === window.onset_s)?.drawing;
        return found?.lines && found.window.rms_residual !== null
          ? [
              {
                number: i + 1,
                rmsNm: found.window.rms_residual,
                timeS: found.lines.timeS,
                residualNm: found.lines.residualNm,
                words: wordsOf(window),
              },
            ]
          : [];
      }),
    [ofAxis, drawings, wordsOf],
  );
  const shown =
    drawing !== null && drawing.window.axis === axis && chosen !== null ? drawing : null;
  const pooled =
    fits.lastResult?.pooled.find(
      (each) => each.axis === axis && each.direction === shown?.window.direction,
    ) ?? null;
  const commonFlags = useMemo(
    () => [
      ...opened.flags,
      ...axisFlags((fits.lastResult?.pooled ?? []).filter((each) => each.axis === axis)),
    ],
    [opened, fits.lastResult, axis],
  );
  const flagsAbove = useMemo(() => new Set(commonFlags.map(({ code }) => code)), [commonFlags]);
  const isAside = chosen !== null && !chosen.included;
  const marks = useMemo(
    () => (onsetS === null || windowMs === null ? null : { onsetS, windowMs, aside: isAside }),
    [onsetS, windowMs, isAside],
  );
  const setAsideCount = ofAxis.filter((window) => !window.included).length;
  const toUndo = edits.list === null ? null : editToUndo(edits.list);
  const toRedo = edits.list === null ? null : editToRedo(edits.list);

  const zoomButtons = (
    <fieldset aria-label="Zoom" className="flex gap-1">
      <ZoomButton label="zoom out" onClick={() => zoom(NEAR_STEP, middleS)}>
        −
      </ZoomButton>
      <ZoomButton label="zoom in" onClick={() => zoom(1 / NEAR_STEP, middleS)}>
        +
      </ZoomButton>
      {view.kind === "near" ? (
        <ZoomButton label="of the recording" onClick={actions.whole}>
          All
        </ZoomButton>
      ) : (
        <ZoomButton label="window" onClick={actions.near}>
          One
        </ZoomButton>
      )}
    </fieldset>
  );
  const links = (
    <>
      <button
        className="min-h-6 underline decoration-edge underline-offset-3"
        onClick={() => setAsTable(!asTable)}
        type="button"
      >
        {asTable ? "Hide the table" : "Show as table"}
      </button>
      <button
        aria-keyshortcuts="?"
        className="min-h-6 underline decoration-edge underline-offset-3"
        onClick={() => setDialog("keys")}
        type="button"
      >
        Keys
      </button>
    </>
  );

  return (
    <div className="grid min-h-dvh xl:grid-cols-[minmax(0,1fr)_312px] lg:grid-cols-[minmax(0,1fr)_288px]">
      <div className="flex min-w-0 flex-col px-5 pt-4 pb-6">
        {head}
        {theirs !== null ? (
          <TwoStates
            actions={
              <>
                <Button onClick={edits.takeTheirs} type="button">
                  Go on with theirs
                </Button>
                <Button onClick={edits.keepMine} type="button">
                  Keep mine
                </Button>
              </>
            }
            mine={{
              title: "Yours, not saved",
              words: `${countOf(edits.unsaved, "window")} changed; kept on this computer.`,
              windows,
              pooled: fits.lastResult?.pooled ?? [],
            }}
            theirs={theirs}
          />
        ) : null}
        <FlagSummary flags={commonFlags} />
        {ofAxis.length === 0 ? (
          <Empty text="No perturbation was found on this axis. Check the angle’s unit and the expected movement in the protocol, or add a window by hand." />
        ) : null}
        <div
          className="mb-1.5 grid grid-cols-[minmax(0,1fr)] items-center md:grid-cols-[100px_minmax(0,1fr)]"
          ref={box}
        >
          <p className="flex gap-2 text-sm md:block">
            All <span className="font-mono">{formatNumber(whole.toS - whole.fromS, 0)} s</span>
            <span className="font-mono text-ink-2 md:block">
              {countOf(ofAxis.length, "window")}
            </span>
            {setAsideCount > 0 ? (
              <span className="sr-only">, {setAsideCount} set aside</span>
            ) : null}
          </p>
          {overview ? (
            <OverviewStrip
              angleDeg={overview.angleDeg}
              chosen={chosen === null ? null : chosenIndex}
              endS={whole.toS}
              onChoose={choose}
              startS={whole.fromS}
              timeS={overview.timeS}
              view={range}
              windows={strip}
            />
          ) : (
            <div className="h-9 border border-rule" />
          )}
        </div>
        <div
          className="relative flex flex-col"
          style={{ height: `max(${heightFor(opened.emg.length)}px, calc(100dvh - 420px))` }}
        >
          <TraceArea
            baselineMs={protocol.baseline_ms}
            canEdit={canEdit}
            chosen={marks}
            emg={opened.emg}
            isMoving={moving !== null}
            label={
              chosen === null
                ? "Angle, velocity, torque and residual"
                : `Angle, velocity, torque and residual of window ${number}; the same as a table by the button below`
            }
            onClick={(atS) => {
              if (view.kind === "near") return;
              const index = ofAxis.findIndex(
                (window) =>
                  atS >= window.onset_s + Math.min(0, window.window_ms[0] / 1000) &&
                  atS <= window.onset_s + window.window_ms[1] / 1000,
              );
              if (index >= 0) choose(index);
            }}
            onCursor={setCursorS}
            onDone={edgeDone}
            onMove={moveEdge}
            onPan={(byS) => setView((held) => panned(held, onsetS, whole, byS))}
            onZoom={zoom}
            originS={originS}
            otherDrawings={otherDrawings}
            others={others}
            range={range}
            ref={area}
            sampleMs={sampleMs}
            stretch={stretch}
          />
          <div className="absolute bottom-0 left-0 hidden sm:block">{zoomButtons}</div>
          <div className="absolute bottom-0 left-[104px] hidden gap-2 text-sm text-ink-2 sm:flex">
            {links}
          </div>
        </div>
        <div className="flex gap-3 text-sm sm:hidden">
          {zoomButtons}
          {links}
        </div>
        <div className="my-3 flex flex-wrap items-center gap-2">
          <Button
            disabled={chosenIndex <= 0}
            keyHint="←"
            onClick={() => choose(chosenIndex - 1)}
            type="button"
          >
            Previous
          </Button>
          <Button
            disabled={chosenIndex >= ofAxis.length - 1}
            keyHint="→"
            onClick={() => choose(chosenIndex + 1)}
            type="button"
          >
            Next
          </Button>
          {canEdit ? (
            <>
              <Button
                disabled={toUndo === null}
                keyHint="Z"
                onClick={actions.undo}
                title={toUndo === null ? "Nothing to undo" : `Undo: ${toUndo.words}`}
                type="button"
              >
                Undo
              </Button>
              <Button
                disabled={toRedo === null}
                onClick={actions.redo}
                title={toRedo === null ? "Nothing to redo" : `Redo: ${toRedo.words}`}
                type="button"
              >
                Redo
              </Button>
            </>
          ) : null}
          {canEdit ? (
            <div className="ml-auto flex flex-wrap gap-2">
              <Button
                disabled={!canUseForAll}
                onClick={actions.useForAll}
                title={canUseForAll ? undefined : "All windows of this axis have this trim"}
                type="button"
              >
                Use this trim for all
              </Button>
              <Button
                busy={isSaving}
                busyLabel="Saving"
                disabled={!canSave || windows.length === 0}
                look="do"
                onClick={actions.save}
                title={canSave ? undefined : "Everything is saved"}
                type="button"
              >
                Save {countOf(windows.length, "window")}
              </Button>
            </div>
          ) : null}
        </div>
        {asTable && stretch ? (
          <TraceTable
            drawings={shown ? [...otherDrawings, shown] : otherDrawings}
            originS={originS}
            stretch={stretch}
          />
        ) : null}
        <ResidualList
          chosen={chosen === null ? null : number}
          onChoose={(next) => choose(next - 1)}
          windows={residuals}
        />
        {foot}
      </div>
      <aside
        aria-label="The chosen window"
        className="flex flex-col border-t border-rule bg-sheet p-4 lg:border-t-0 lg:border-l"
      >
        <div className="flex flex-col lg:sticky lg:top-4 lg:h-[calc(100dvh-2rem)]">
          {chosen === null ? (
            <p className="text-ink-2">Numbers of a window stand here once there is one.</p>
          ) : (
            <WindowDrawer
              actions={
                canEdit ? (
                  <>
                    <Button keyHint="X" onClick={actions.aside} type="button">
                      {chosen.included ? "Set aside" : "Take back"}
                    </Button>
                    <Button
                      disabled={!canSnap}
                      keyHint="O"
                      onClick={actions.snap}
                      title={canSnap ? undefined : "The window begins at its onset"}
                      type="button"
                    >
                      Snap to onset
                    </Button>
                    <Button keyHint="A" onClick={actions.add} type="button">
                      Add by hand
                    </Button>
                  </>
                ) : null
              }
              flagsAbove={flagsAbove}
              isByHand={chosen.origin === "by_hand"}
              isPooling={fits.result === null}
              level={protocol.uncertainty.level}
              number={number}
              pooled={pooled}
              share={shown?.share ?? null}
              window={shown?.window ?? null}
            />
          )}
        </div>
      </aside>
      <SetAsideDialog
        onClose={() => setDialog(null)}
        onSetAside={(reason) => {
          setDialog(null);
          if (key !== null) edit((list) => setAside(list, key, reason));
        }}
        open={dialog === "set aside"}
        windowNumber={number}
      />
      <AddWindowDialog
        cursorS={cursorS}
        endS={whole.toS}
        onAdd={(atS) => {
          setDialog(null);
          edit((list) =>
            addByHand(list, { axis, onset_s: atS, window_ms: [...protocol.window_ms] }),
          );
          setOnsets((held) => ({ ...held, [axis]: atS }));
          setView((held) => showing(held, atS, whole));
        }}
        onClose={() => setDialog(null)}
        open={dialog === "add"}
        startS={whole.fromS}
        takenS={ofAxis.map((window) => window.onset_s)}
        windowMs={protocol.window_ms}
      />
      <KeysDialog
        enabled={singleKeys}
        lines={canEdit ? EDITING_KEYS : READING_KEYS}
        onClose={() => setDialog(null)}
        onEnable={setSingleKeys}
        open={dialog === "keys"}
      />
    </div>
  );
}

/** Four panes and one for each muscle, at least 80 px each, and the time axis. */
function heightFor(muscles: number): number {
  return (4 + muscles) * 88 + 60;
}

function ZoomButton({
  label,
  onClick,
  children,
}: {
  label: string;
  onClick: () => void;
  children: ReactNode;
}) {
  return (
    <button
      className="min-h-6 min-w-6 rounded-sm border border-edge bg-paper px-1 text-sm hover:bg-hover"
      onClick={onClick}
      type="button"
    >
      {children} <span className="sr-only">{label}</span>
    </button>
  );
}

const DRAWN = "drag-to-drawn";
/** A browser keeps every measure until it is told not to. */
const MOST_MEASURES = 2000;
let measures = 0;

/** From the input event to the painted canvas, for the browser's own timeline and for benchmarks. */
function noteDrawn(eventTime: number): void {
  measures = (measures + 1) % MOST_MEASURES;
  if (measures === 0) performance.clearMeasures(DRAWN);
  performance.measure(DRAWN, { start: eventTime });
}

function choiceOf({ axis, onset_s, window_ms, included, reason }: WindowChoice): WindowChoice {
  return { axis, onset_s, window_ms, included, reason };
}

function sameSpan(one: readonly [number, number], other: readonly [number, number]): boolean {
  return one[0] === other[0] && one[1] === other[1];
}
