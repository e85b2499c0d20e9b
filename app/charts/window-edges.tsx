import { type KeyboardEvent, type PointerEvent, useRef } from "react";

export type Edge = "start" | "end";

const STEPS: Record<string, number> = {
  ArrowLeft: -1,
  ArrowDown: -1,
  ArrowRight: 1,
  ArrowUp: 1,
  PageUp: 10,
  PageDown: -10,
};

/**
 * The two edges of the chosen window as sliders over a stack of traces: by hand, or by the arrow
 * keys, one sample each (ten with Shift or Page up and down). Hit areas lie outside the window, so
 * that a short one can still be widened.
 */
export function WindowEdges({
  windowMs,
  sampleMs,
  range,
  onsetS,
  onMove,
  onDone,
}: {
  windowMs: readonly [number, number];
  sampleMs: number;
  range: { fromS: number; toS: number };
  onsetS: number;
  /** The edge is on its way; `eventTime` is the input event's own stamp. */
  onMove: (edge: Edge, ms: number, eventTime: number) => void;
  /** The edge was let go: the trim counts. */
  onDone: () => void;
}) {
  return (["start", "end"] as const).map((edge) => (
    <EdgeSlider
      edge={edge}
      key={edge}
      onDone={onDone}
      onMove={onMove}
      onsetS={onsetS}
      range={range}
      sampleMs={sampleMs}
      windowMs={windowMs}
    />
  ));
}

function EdgeSlider({
  edge,
  windowMs,
  sampleMs,
  range,
  onsetS,
  onMove,
  onDone,
}: {
  edge: Edge;
  windowMs: readonly [number, number];
  sampleMs: number;
  range: { fromS: number; toS: number };
  onsetS: number;
  onMove: (edge: Edge, ms: number, eventTime: number) => void;
  onDone: () => void;
}) {
  const held = useRef<{ pointerId: number; offsetMs: number } | null>(null);
  const stepping = useRef(false);
  const ms = edge === "start" ? windowMs[0] : windowMs[1];

  /** Whole samples after the onset; an edge never crosses the other. */
  function allowed(wantedMs: number): number {
    const whole = Math.round(wantedMs / sampleMs) * sampleMs;
    const kept =
      edge === "start"
        ? Math.min(whole, windowMs[1] - sampleMs)
        : Math.max(whole, windowMs[0] + sampleMs);
    return Number(Math.min(10_000, Math.max(-10_000, kept)).toFixed(6));
  }

  function msAt(event: PointerEvent<HTMLElement>): number {
    const box = event.currentTarget.parentElement?.getBoundingClientRect();
    if (!box || box.width === 0) return ms;
    const atS = range.fromS + ((event.clientX - box.left) / box.width) * (range.toS - range.fromS);
    return (atS - onsetS) * 1000;
  }

  function letGo() {
    if (held.current === null) return;
    held.current = null;
    onDone();
  }

  function stepped(event: KeyboardEvent) {
    const step = STEPS[event.key];
    if (step === undefined || event.altKey || event.ctrlKey || event.metaKey) return;
    event.preventDefault();
    event.stopPropagation();
    stepping.current = true;
    const samples = event.shiftKey && Math.abs(step) === 1 ? step * 10 : step;
    onMove(edge, allowed(ms + samples * sampleMs), event.timeStamp);
  }

  function stepsDone() {
    if (!stepping.current) return;
    stepping.current = false;
    onDone();
  }

  return (
    <div
      aria-label={edge === "start" ? "Start of the window" : "End of the window"}
      aria-valuemax={edge === "start" ? windowMs[1] - sampleMs : 10_000}
      aria-valuemin={edge === "start" ? -10_000 : windowMs[0] + sampleMs}
      aria-valuenow={ms}
      aria-valuetext={`${ms} ms after onset`}
      className={`group pointer-events-auto absolute inset-y-0 w-7 cursor-ew-resize touch-none outline-none ${
        edge === "start" ? "-translate-x-[22px]" : "-translate-x-[6px]"
      }`}
      data-edge={edge}
      onBlur={stepsDone}
      onKeyDown={stepped}
      onKeyUp={stepsDone}
      onLostPointerCapture={letGo}
      onPointerDown={(event) => {
        if (event.button !== 0) return;
        event.currentTarget.setPointerCapture(event.pointerId);
        event.currentTarget.focus({ preventScroll: true });
        held.current = { pointerId: event.pointerId, offsetMs: msAt(event) - ms };
      }}
      onPointerMove={(event) => {
        if (held.current === null) return;
        const next = allowed(msAt(event) - held.current.offsetMs);
        if (next !== ms) onMove(edge, next, event.timeStamp);
      }}
      onPointerUp={letGo}
      role="slider"
      style={{ left: `var(--${edge}, -200%)` }}
      tabIndex={0}
    >
      <span
        className={`pointer-events-none absolute inset-y-0 hidden w-[3px] -translate-x-px bg-focus group-focus-visible:block ${
          edge === "start" ? "left-[22px]" : "left-[6px]"
        }`}
      />
      <span
        className={`pointer-events-none absolute top-0 hidden bg-ink px-1 font-mono text-sm whitespace-nowrap text-paper group-focus:block group-active:block ${
          edge === "start" ? "right-[6px]" : "left-[6px]"
        }`}
      >
        {`${Number(ms.toFixed(1))}`.replace("-", "−")} ms
      </span>
    </div>
  );
}
