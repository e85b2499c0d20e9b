import { type Ref, useEffect, useImperativeHandle, useLayoutEffect, useMemo, useRef } from "react";
import type { LinePiece, PaneScene } from "#app/charts/trace-pane.ts";
import { type StackPane, TraceStack, type TraceStackHandle } from "#app/charts/trace-stack.tsx";
import { type Edge, WindowEdges } from "#app/charts/window-edges.tsx";
import type { Stretch, WindowDrawing } from "#app/engine/types.ts";
import type { TimeRange } from "./view.ts";

export interface TraceAreaHandle {
  /** Draws the chosen window's fit now, outside React: what follows a hand. */
  show(drawing: WindowDrawing): void;
  /** Takes the cursor to a time. */
  point(atS: number): void;
  /** Puts the keyboard on an edge of the window. */
  focus(edge: Edge): void;
}

/** The chosen window as it stands, also while it is being trimmed. */
export interface ChosenWindow {
  onsetS: number;
  windowMs: readonly [number, number];
  aside: boolean;
}

/** Narrower than this share of the view, a window's edges cannot be taken hold of. */
const LEAST_GRIP_SHARE = 0.03;

const FIXED_PANES: readonly StackPane[] = [
  { key: "angle", title: "Angle", unit: "°", weight: 1 },
  { key: "velocity", title: "Velocity", unit: "°/s", weight: 0.85 },
  { key: "torque", title: "Torque", unit: "N·m", weight: 1.45 },
  { key: "residual", title: "Residual", unit: "N·m", weight: 0.8, symmetric: true },
];

const NO_PIECES: readonly LinePiece[] = [];

/** Angle, velocity, torque with its model, residual and muscles, one above the other. */
export function TraceArea({
  ref,
  label,
  range,
  originS,
  stretch,
  emg,
  chosen,
  baselineMs,
  isMoving,
  others,
  otherDrawings,
  sampleMs,
  canEdit,
  onMove,
  onDone,
  onCursor,
  onClick,
  onPan,
  onZoom,
}: {
  ref: Ref<TraceAreaHandle>;
  label: string;
  range: TimeRange;
  originS: number | null;
  stretch: Stretch | null;
  emg: readonly { muscle: string; unit: "V" | "1" }[];
  chosen: ChosenWindow | null;
  baselineMs: readonly [number, number];
  /** An edge is on its way. */
  isMoving: boolean;
  /** The other windows of the axis, in the file's own time. */
  others: readonly { fromS: number; toS: number; aside: boolean }[];
  otherDrawings: readonly WindowDrawing[];
  sampleMs: number;
  canEdit: boolean;
  onMove: (edge: Edge, ms: number, eventTime: number) => void;
  onDone: () => void;
  onCursor: (atS: number | null) => void;
  onClick: (atS: number) => void;
  onPan: (byS: number) => void;
  onZoom: (factor: number, aboutS: number) => void;
}) {
  const stack = useRef<TraceStackHandle>(null);
  const area = useRef<HTMLDivElement>(null);
  const drawing = useRef<WindowDrawing | null>(null);
  const panes = useMemo(
    () => [
      ...FIXED_PANES,
      ...emg.map(
        ({ muscle, unit }, i): StackPane => ({
          key: `emg${i}`,
          title: muscle,
          unit: unit === "V" ? "mV" : "1",
          weight: 0.7,
        }),
      ),
    ],
    [emg],
  );
  const emgLines = useMemo(
    () =>
      stretch?.emg.map((values, i) =>
        emg[i]?.unit === "V" ? values.map((volts) => volts * 1000) : values,
      ) ?? [],
    [stretch, emg],
  );

  function draw() {
    if (stretch === null) return;
    const shown = [...otherDrawings, ...(drawing.current ? [drawing.current] : [])];
    const pieces = shown.flatMap(({ lines }) =>
      lines !== null && overlaps(lines.timeS, range) ? [lines] : [],
    );
    const line = (values: Float64Array | undefined): PaneScene => ({
      line: values ?? null,
      model: NO_PIECES,
      dots: NO_PIECES,
    });
    const scenes: Record<string, PaneScene> = {
      angle: line(stretch.angleDeg),
      velocity: line(stretch.velocityDegPerS),
      torque: {
        line: stretch.torqueNm,
        model: pieces.map(({ timeS, modelledNm }) => ({ timeS, values: modelledNm })),
        dots: NO_PIECES,
      },
      residual: {
        line: null,
        model: NO_PIECES,
        dots: pieces.map(({ timeS, residualNm }) => ({ timeS, values: residualNm })),
      },
    };
    for (const [i, values] of emgLines.entries()) scenes[`emg${i}`] = line(values);
    stack.current?.draw(
      { ...range, timeS: stretch.timeS, bands: others, steady: isMoving },
      scenes,
    );
  }

  const marks = useMemo(
    () =>
      chosen === null
        ? null
        : {
            onsetS: chosen.onsetS,
            startS: chosen.onsetS + chosen.windowMs[0] / 1000,
            endS: chosen.onsetS + chosen.windowMs[1] / 1000,
            baselineFromS: chosen.onsetS + baselineMs[0] / 1000,
            baselineToS: chosen.onsetS + baselineMs[1] / 1000,
          },
    [chosen, baselineMs],
  );
  // biome-ignore lint/correctness/useExhaustiveDependencies: the marks are shares of the range that is shown.
  useLayoutEffect(() => stack.current?.mark(marks), [marks, range]);

  const widthShare =
    chosen === null
      ? 0
      : (chosen.windowMs[1] - chosen.windowMs[0]) / 1000 / (range.toS - range.fromS);

  const newest = useRef(draw);
  newest.current = draw;
  // biome-ignore lint/correctness/useExhaustiveDependencies: drawn anew when any part of the picture changes; a drag draws by itself.
  useEffect(() => newest.current(), [stretch, emgLines, range, others, otherDrawings]);

  useImperativeHandle(ref, () => ({
    show(next) {
      drawing.current = next;
      newest.current();
    },
    point: (atS) => stack.current?.point(atS),
    focus: (edge) => area.current?.querySelector<HTMLElement>(`[data-edge="${edge}"]`)?.focus(),
  }));

  return (
    <div className="flex min-h-0 flex-1 flex-col" ref={area}>
      <TraceStack
        aside={chosen?.aside ?? false}
        grips={canEdit && widthShare > LEAST_GRIP_SHARE}
        label={label}
        onClick={onClick}
        onCursor={onCursor}
        onPan={onPan}
        onZoom={onZoom}
        originS={originS}
        panes={panes}
        range={range}
        ref={stack}
      >
        {chosen !== null && canEdit ? (
          <WindowEdges
            onDone={onDone}
            onMove={(edge, ms, eventTime) => {
              // The edge is under the hand at once; the fit follows as soon as it is there.
              if (marks !== null) {
                const atS = chosen.onsetS + ms / 1000;
                stack.current?.mark(
                  edge === "start" ? { ...marks, startS: atS } : { ...marks, endS: atS },
                );
              }
              onMove(edge, ms, eventTime);
            }}
            onsetS={chosen.onsetS}
            range={range}
            sampleMs={sampleMs}
            windowMs={chosen.windowMs}
          />
        ) : null}
      </TraceStack>
    </div>
  );
}

function overlaps(timeS: Float64Array, { fromS, toS }: TimeRange): boolean {
  const first = timeS[0];
  const last = timeS[timeS.length - 1];
  return first !== undefined && last !== undefined && last >= fromS && first <= toS;
}
