import {
  type ReactNode,
  type PointerEvent as ReactPointerEvent,
  type Ref,
  useEffect,
  useImperativeHandle,
  useRef,
} from "react";
import { onThemeChange, readColours } from "./colours.ts";
import { roundTicks, tickLabels } from "./ticks.ts";
import { type PaneScene, type TimeScene, TracePane } from "./trace-pane.ts";
import { useWidth } from "./use-width.ts";

/** One pane of the stack: quantity and unit stand at its left. */
export interface StackPane {
  key: string;
  title: string;
  unit: string;
  /** Zero stands in the middle (residuals). */
  symmetric?: boolean;
  /** Its share of the height. */
  weight: number;
}

/** The chosen window, in the file's own time. */
export interface WindowMarks {
  onsetS: number;
  startS: number;
  endS: number;
  baselineFromS: number;
  baselineToS: number;
}

/** What is drawn outside React, since it follows a hand. */
export interface TraceStackHandle {
  draw(time: TimeScene, scenes: Readonly<Record<string, PaneScene>>): void;
  /** Moves the chosen window's shading and edges; null hides them. */
  mark(marks: WindowMarks | null): void;
  /** Takes the cursor to a time. */
  point(atS: number | null): void;
}

const GUTTER_PX = 100;
const NARROW_GUTTER_PX = 54;
/** Room for a quantity's name beside its tick labels. */
const TITLE_PX = 58;
const NARROW_PX = 560;
/** A press that moves less than this is a click. */
const CLICK_PX = 4;

/**
 * Traces one above the other on one time axis, with one cursor. `children` lie over the traces:
 * their left edge is `fromS`, their right edge `toS`.
 */
export function TraceStack({
  ref,
  panes,
  range: { fromS, toS },
  originS,
  label,
  aside = false,
  grips = true,
  onCursor,
  onClick,
  onPan,
  onZoom,
  children,
}: {
  ref: Ref<TraceStackHandle>;
  panes: readonly StackPane[];
  range: { fromS: number; toS: number };
  /** Zero of the time axis in ms; null for seconds in the recording. */
  originS: number | null;
  /** What a screen reader says of the picture. */
  label: string;
  /** The chosen window is set aside: hatched. */
  aside?: boolean;
  /** Whether the chosen window is wide enough for its edges to be taken hold of. */
  grips?: boolean;
  /** Where the cursor is, in the file's own time; null where it is nowhere. */
  onCursor: (atS: number | null) => void;
  onClick: (atS: number) => void;
  /** Moves the range by so many seconds. */
  onPan: (byS: number) => void;
  /** Widens (over 1) or narrows the range about a time. */
  onZoom: (factor: number, aboutS: number) => void;
  children?: ReactNode;
}) {
  const [root, width] = useWidth<HTMLDivElement>(700);
  const narrow = width < NARROW_PX;
  const gutterPx = narrow ? NARROW_GUTTER_PX : GUTTER_PX;
  const plots = useRef(new Map<string, TracePane>());
  const hosts = useRef(new Map<string, HTMLElement>());
  const readouts = useRef(new Map<string, HTMLElement>());
  const lastDraw = useRef<{ time: TimeScene; scenes: Readonly<Record<string, PaneScene>> } | null>(
    null,
  );
  const overlay = useRef<HTMLDivElement>(null);
  const pinned = useRef<number | null>(null);
  const cursor = useRef<number | null>(null);
  const range = useRef({ fromS, toS });
  range.current = { fromS, toS };

  const keys = panes.map((pane) => pane.key).join(" ");
  // biome-ignore lint/correctness/useExhaustiveDependencies: panes are named by their keys; the list itself is new with each render.
  useEffect(() => {
    const made = plots.current;
    const stack = root.current;
    if (stack === null) return;
    const sizes = new ResizeObserver((entries) => {
      for (const { target, contentRect } of entries) {
        const key = (target as HTMLElement).dataset.pane ?? "";
        made.get(key)?.resize(contentRect.width, contentRect.height);
      }
    });
    for (const pane of panes) {
      const host = hosts.current.get(pane.key);
      if (host === undefined) continue;
      const colours = readColours(stack);
      made.set(
        pane.key,
        new TracePane(host, { gutterPx, symmetric: pane.symmetric ?? false, colours }),
      );
      sizes.observe(host);
    }
    const recolour = () => {
      const colours = readColours(stack);
      for (const plot of made.values()) plot.recolour(colours);
    };
    const stopThemes = onThemeChange(recolour);
    // Tick labels are measured again once their typeface is there.
    void document.fonts.ready.then(recolour);
    if (lastDraw.current) drawAll(made, lastDraw.current.time, lastDraw.current.scenes);
    return () => {
      stopThemes();
      sizes.disconnect();
      for (const plot of made.values()) plot.destroy();
      made.clear();
    };
  }, [keys, gutterPx]);

  useImperativeHandle(ref, () => ({
    draw(time, scenes) {
      lastDraw.current = { time, scenes };
      drawAll(plots.current, time, scenes);
      // Range or values are new under a cursor that stays at its time.
      placeCursor(cursor.current);
    },
    mark(marks) {
      const style = root.current?.style;
      if (style === undefined) return;
      const { fromS: from, toS: to } = range.current;
      const set = (name: string, atS: number | null) =>
        style.setProperty(
          name,
          atS === null ? "-200%" : `${(((atS - from) / (to - from)) * 100).toFixed(4)}%`,
        );
      set("--onset", marks?.onsetS ?? null);
      set("--start", marks?.startS ?? null);
      set("--end", marks?.endS ?? null);
      set("--base-from", marks?.baselineFromS ?? null);
      set("--base-to", marks?.baselineToS ?? null);
    },
    point(atS) {
      pinned.current = atS;
      showCursor(atS);
    },
  }));

  /** @returns whether that time is in view */
  function placeCursor(atS: number | null): boolean {
    const style = root.current?.style;
    const { fromS: from, toS: to } = range.current;
    const visible = atS !== null && atS >= from && atS <= to;
    style?.setProperty(
      "--cursor",
      visible ? `${(((atS - from) / (to - from)) * 100).toFixed(3)}%` : "-200%",
    );
    for (const [key, element] of readouts.current) {
      const drawn = lastDraw.current;
      const scene = drawn?.scenes[key];
      element.textContent = visible && drawn && scene ? valueAt(drawn.time.timeS, scene, atS) : "";
    }
    return visible;
  }

  function showCursor(atS: number | null) {
    cursor.current = atS;
    onCursor(placeCursor(atS) ? atS : null);
  }

  function timeAt(clientX: number): number {
    const box = overlay.current?.getBoundingClientRect();
    const { fromS: from, toS: to } = range.current;
    if (!box || box.width === 0) return from;
    return from + ((clientX - box.left) / box.width) * (to - from);
  }

  useEffect(() => {
    const element = overlay.current;
    if (element === null) return;
    let outsideAt = Number.NEGATIVE_INFINITY;
    // A page that is being scrolled is not caught when the traces come under the pointer.
    const noteOutside = (event: WheelEvent) => {
      if (!element.contains(event.target as Node)) outsideAt = event.timeStamp;
    };
    const zoom = (event: WheelEvent) => {
      if (event.timeStamp - outsideAt < 400) {
        outsideAt = event.timeStamp;
        return;
      }
      event.preventDefault();
      if (Math.abs(event.deltaX) > Math.abs(event.deltaY)) {
        const { fromS: from, toS: to } = range.current;
        onPan((event.deltaX / Math.max(1, element.clientWidth)) * (to - from));
      } else onZoom(Math.exp(event.deltaY * 0.0016), timeAt(event.clientX));
    };
    document.addEventListener("wheel", noteOutside, { passive: true });
    element.addEventListener("wheel", zoom, { passive: false });
    return () => {
      document.removeEventListener("wheel", noteOutside);
      element.removeEventListener("wheel", zoom);
    };
  });

  const press = useRef<{ x: number; lastX: number; moved: boolean } | null>(null);
  function pressed(event: ReactPointerEvent) {
    if (event.button !== 0) return;
    press.current = { x: event.clientX, lastX: event.clientX, moved: false };
    if (event.pointerType !== "touch") overlay.current?.setPointerCapture(event.pointerId);
  }
  function moved(event: ReactPointerEvent) {
    const held = press.current;
    if (held === null) {
      showCursor(timeAt(event.clientX));
      return;
    }
    if (Math.abs(event.clientX - held.x) > CLICK_PX) held.moved = true;
    if (!held.moved) return;
    onPan(timeAt(held.lastX) - timeAt(event.clientX));
    held.lastX = event.clientX;
  }
  function released(event: ReactPointerEvent) {
    const held = press.current;
    press.current = null;
    if (held === null || held.moved) return;
    pinned.current = timeAt(event.clientX);
    showCursor(pinned.current);
    onClick(pinned.current);
  }

  return (
    <div className="flex min-h-0 flex-1 flex-col" ref={root}>
      <div
        className="relative grid min-h-0 flex-1 gap-2"
        style={{
          gridTemplateRows: panes.map((pane) => `minmax(80px, ${pane.weight}fr)`).join(" "),
        }}
      >
        {panes.map((pane) => (
          <div className="relative min-h-0 overflow-hidden" key={pane.key}>
            <div
              className="absolute inset-y-0 right-0 overflow-hidden border border-rule"
              style={{ left: gutterPx }}
            >
              <ChosenWindow aside={aside} baseline={!pane.symmetric} />
            </div>
            <div
              aria-hidden="true"
              className="absolute inset-0"
              data-pane={pane.key}
              ref={(element) => {
                if (element) hosts.current.set(pane.key, element);
                else hosts.current.delete(pane.key);
              }}
            />
            <div
              className={`pointer-events-none absolute flex text-sm ${
                narrow ? "top-0.5 gap-1.5 bg-paper/80 px-1" : "top-0.5 left-0 flex-col"
              }`}
              style={narrow ? { left: gutterPx + 2 } : { maxWidth: TITLE_PX }}
            >
              <span>{pane.title}</span>
              <span className="font-mono text-ink-2">{pane.unit}</span>
              <span
                className="font-mono"
                ref={(element) => {
                  if (element) readouts.current.set(pane.key, element);
                  else readouts.current.delete(pane.key);
                }}
              />
            </div>
            <div
              className="pointer-events-none absolute inset-y-0 right-0 overflow-hidden"
              style={{ left: gutterPx }}
            >
              <ChosenLines grips={grips && !pane.symmetric} />
            </div>
          </div>
        ))}
        <div
          aria-label={label}
          className="absolute inset-y-0 right-0 cursor-crosshair touch-pan-y overflow-hidden"
          onPointerCancel={() => {
            press.current = null;
          }}
          onPointerDown={pressed}
          onPointerLeave={() => {
            if (press.current === null) showCursor(pinned.current);
          }}
          onPointerMove={moved}
          onPointerUp={released}
          ref={overlay}
          role="img"
          style={{ left: gutterPx }}
        >
          <div
            className="pointer-events-none absolute inset-y-0 w-px bg-ink-2"
            style={{ left: "var(--cursor, -200%)" }}
          />
        </div>
        <div
          className="pointer-events-none absolute inset-y-0 right-0 overflow-hidden"
          style={{ left: gutterPx }}
        >
          {children}
        </div>
      </div>
      <TimeAxis fromS={fromS} gutterPx={gutterPx} originS={originS} toS={toS} width={width} />
    </div>
  );
}

function drawAll(
  plots: ReadonlyMap<string, TracePane>,
  time: TimeScene,
  scenes: Readonly<Record<string, PaneScene>>,
): void {
  for (const [key, plot] of plots) {
    const scene = scenes[key];
    if (scene) plot.draw(time, scene);
  }
}

/** Shading and baseline, beneath the lines. */
function ChosenWindow({ baseline, aside }: { baseline: boolean; aside: boolean }) {
  return (
    <>
      <div
        className={`absolute inset-y-0 ${aside ? "opacity-50" : "bg-hover"}`}
        style={{
          left: "var(--start, -200%)",
          right: "calc(100% - var(--end, -200%))",
          backgroundImage: aside
            ? "repeating-linear-gradient(135deg, var(--aside) 0 1px, transparent 1px 6px)"
            : undefined,
        }}
      />
      {baseline ? (
        <div
          className="absolute bottom-0 h-[3px] bg-aside"
          style={{ left: "var(--base-from, -200%)", right: "calc(100% - var(--base-to, -200%))" }}
        />
      ) : null}
    </>
  );
}

/** Onset and edges, above the lines. */
function ChosenLines({ grips }: { grips: boolean }) {
  return (
    <>
      <div
        className="absolute inset-y-0 border-l border-dashed border-ink"
        style={{ left: "var(--onset, -200%)" }}
      />
      {["--start", "--end"].map((edge) => (
        <div
          className="absolute inset-y-0 flex w-0 items-center justify-center"
          key={edge}
          style={{ left: `var(${edge}, -200%)` }}
        >
          <div className={`h-full w-px shrink-0 ${edge === "--end" ? "bg-ink" : "bg-ink/60"}`} />
          {grips ? (
            <div className="absolute h-5 w-2 rounded-sm border border-ink bg-sheet" />
          ) : null}
        </div>
      ))}
    </>
  );
}

function TimeAxis({
  fromS,
  toS,
  originS,
  gutterPx,
  width,
}: {
  fromS: number;
  toS: number;
  originS: number | null;
  gutterPx: number;
  width: number;
}) {
  const scale = originS === null ? 1 : 1000;
  const zero = originS ?? 0;
  const [low, high] = [(fromS - zero) * scale, (toS - zero) * scale];
  const ticks = roundTicks(low, high, width - gutterPx < 420 ? 4 : 7);
  const labels = tickLabels(ticks);
  return (
    <div className="relative h-10 shrink-0 text-sm text-ink-2" style={{ marginLeft: gutterPx }}>
      {ticks.map((tick, i) => (
        <span
          className="absolute top-1 -translate-x-1/2 font-mono whitespace-nowrap"
          key={tick}
          style={{ left: `${((tick - low) / (high - low)) * 100}%` }}
        >
          {labels[i]}
        </span>
      ))}
      <span className="absolute right-0 bottom-0 bg-paper pl-2">
        {originS === null ? "s in the recording" : "ms after onset"}
      </span>
    </div>
  );
}

/** The value of a pane at a time, as written beside it. */
function valueAt(timeS: Float64Array, scene: PaneScene, atS: number): string {
  const piece = scene.line
    ? { timeS, values: scene.line }
    : scene.dots.find((dots) => isWithin(dots.timeS, atS));
  if (piece === undefined || !isWithin(piece.timeS, atS)) return "";
  const value = piece.values[nearest(piece.timeS, atS)] as number;
  if (!Number.isFinite(value)) return "";
  const size = Math.abs(value);
  const decimals = size >= 100 ? 0 : size >= 10 ? 1 : size >= 1 ? 2 : size >= 0.1 ? 3 : 4;
  return value
    .toFixed(decimals)
    .replace(/^-(?=.*[1-9])/, "−")
    .replace(/^-/, "");
}

function isWithin(timeS: Float64Array, atS: number): boolean {
  const first = timeS[0];
  const last = timeS[timeS.length - 1];
  return first !== undefined && last !== undefined && atS >= first && atS <= last;
}

function nearest(timeS: Float64Array, atS: number): number {
  let low = 0;
  let high = timeS.length - 1;
  while (high - low > 1) {
    const middle = (low + high) >>> 1;
    if ((timeS[middle] as number) <= atS) low = middle;
    else high = middle;
  }
  return atS - (timeS[low] as number) <= (timeS[high] as number) - atS ? low : high;
}
