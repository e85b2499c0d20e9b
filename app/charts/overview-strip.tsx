import { type KeyboardEvent, type MouseEvent, useId, useMemo } from "react";
import { Hatch } from "./hatch.tsx";
import { linePath } from "./path.ts";
import { spread } from "./ticks.ts";
import { useWidth } from "./use-width.ts";

/** A window in the strip, in the file's own time. */
export interface StripWindow {
  number: number;
  startS: number;
  endS: number;
  onsetS: number;
  aside: boolean;
  /** "towards extension, set aside": read out with its number. */
  words: string;
}

const HEIGHT = 34;

/**
 * The whole recording at a glance with every window in it: a click or the arrow keys choose one.
 * A thin box shows what the traces below it hold.
 */
export function OverviewStrip({
  timeS,
  angleDeg,
  startS,
  endS,
  windows,
  chosen,
  view,
  onChoose,
}: {
  timeS: Float64Array;
  angleDeg: Float64Array;
  startS: number;
  endS: number;
  windows: readonly StripWindow[];
  /** Place in `windows`, or null. */
  chosen: number | null;
  view: { fromS: number; toS: number };
  onChoose: (index: number) => void;
}) {
  const hatch = useId();
  const [box, width] = useWidth<HTMLDivElement>(660);
  const path = useMemo(() => {
    const [low, high] = spread([angleDeg]) ?? [-1, 1];
    const range = { left: startS, right: endS, low: low - 1e-9, high: high + 1e-9 };
    return linePath(timeS, angleDeg, range, width, HEIGHT);
  }, [timeS, angleDeg, startS, endS, width]);
  const xOf = (atS: number) => ((atS - startS) / (endS - startS)) * width;

  function chooseAt(event: MouseEvent) {
    const left = event.currentTarget.getBoundingClientRect().left;
    const atS = startS + ((event.clientX - left) / width) * (endS - startS);
    let nearest: number | null = null;
    for (const [i, window] of windows.entries()) {
      const held = nearest === null ? undefined : windows[nearest];
      if (!held || Math.abs(window.onsetS - atS) < Math.abs(held.onsetS - atS)) nearest = i;
    }
    if (nearest !== null) onChoose(nearest);
  }

  function chooseByKey(event: KeyboardEvent) {
    const last = windows.length - 1;
    const at = chosen ?? 0;
    const next =
      event.key === "ArrowRight" || event.key === "ArrowUp"
        ? Math.min(at + 1, last)
        : event.key === "ArrowLeft" || event.key === "ArrowDown"
          ? Math.max(at - 1, 0)
          : event.key === "Home"
            ? 0
            : event.key === "End"
              ? last
              : null;
    if (next === null || last < 0) return;
    event.preventDefault();
    event.stopPropagation();
    onChoose(next);
  }

  const words = chosen === null ? undefined : windows[chosen];
  return (
    <div
      aria-label="Windows of the whole recording"
      aria-valuemax={Math.max(1, windows.length)}
      aria-valuemin={windows.length === 0 ? 0 : 1}
      aria-valuenow={words?.number ?? 0}
      aria-valuetext={
        words
          ? `Window ${words.number} of ${windows.length}, ${words.words}, at ${words.onsetS.toFixed(2)} s`
          : "No window"
      }
      className="relative min-w-0 cursor-pointer overflow-hidden border border-rule"
      onClick={chooseAt}
      onKeyDown={chooseByKey}
      ref={box}
      role="slider"
      tabIndex={0}
    >
      <svg aria-hidden="true" className="block" height={HEIGHT} width={width}>
        <defs>
          <Hatch id={hatch} />
        </defs>
        <rect
          fill="var(--hover)"
          height={HEIGHT}
          width={Math.max(2, xOf(view.toS) - xOf(view.fromS))}
          x={xOf(view.fromS)}
          y={0}
        />
        <path d={path} fill="none" stroke="var(--ink-2)" strokeWidth="1" />
        {windows.map((window, i) => {
          const x = xOf(window.onsetS);
          if (window.aside) {
            return (
              <g key={window.number}>
                <rect fill="var(--paper)" height={HEIGHT} width="9" x={x - 4} />
                <rect fill={`url(#${hatch})`} height={HEIGHT} width="9" x={x - 4} />
                {i === chosen ? <Bar height={HEIGHT} x={x} /> : null}
              </g>
            );
          }
          return i === chosen ? (
            <Bar height={HEIGHT} key={window.number} x={x} />
          ) : (
            <path
              d={`M${Math.round(x) + 0.5} 0V${HEIGHT}`}
              key={window.number}
              stroke="var(--ink)"
              strokeWidth="1"
            />
          );
        })}
      </svg>
    </div>
  );
}

function Bar({ x, height }: { x: number; height: number }) {
  return <rect fill="var(--ink)" height={height} width="4" x={x - 2} />;
}
