import type { ReactNode } from "react";
import type { PlotRange } from "./path.ts";
import { tickLabels } from "./ticks.ts";
import { useWidth } from "./use-width.ts";

const GUTTER = 52;
const FOOT = 34;
const HEAD = 6;
const END = 8;

/** What a plot's content needs to know of its place: the range, and the box in pixels. */
export interface PlotBox {
  range: PlotRange;
  width: number;
  height: number;
}

/**
 * Axes of one plot: quantity and unit beside each, round ticks, the zero line. Words keep their
 * size: the plot is laid out for the width it has.
 */
export function PlotFrame({
  label,
  x,
  y,
  height,
  before,
  children,
}: {
  /** What a screen reader says of the picture. */
  label: string;
  x: { title: string; low: number; high: number; ticks: readonly number[] };
  y: { title: string; low: number; high: number; ticks: readonly number[] };
  /** Of the whole figure, px. */
  height: number;
  /** Width until the page is measured, px. */
  before: number;
  children: (box: PlotBox) => ReactNode;
}) {
  const [element, width] = useWidth<HTMLDivElement>(before);
  const box = {
    range: { left: x.low, right: x.high, low: y.low, high: y.high },
    width: Math.max(10, width - GUTTER - END),
    height: height - FOOT - HEAD,
  };
  const xOf = (value: number) => ((value - x.low) / (x.high - x.low)) * box.width;
  const yOf = (value: number) => box.height - ((value - y.low) / (y.high - y.low)) * box.height;
  const xLabels = tickLabels(x.ticks);
  const yLabels = tickLabels(y.ticks);
  return (
    <div className="min-w-0" ref={element}>
      <svg aria-label={label} className="block text-sm" height={height} role="img" width={width}>
        <title>{label}</title>
        <g transform={`translate(${GUTTER} ${HEAD})`}>
          <rect fill="none" height={box.height} stroke="var(--rule)" width={box.width} />
          {y.ticks.map((tick, i) => (
            <g key={tick}>
              <path
                d={`M0 ${Math.round(yOf(tick)) + 0.5}H${box.width}`}
                stroke="var(--rule)"
                strokeDasharray={tick === 0 ? undefined : "2 3"}
              />
              <text
                className="font-mono"
                dominantBaseline="middle"
                fill="var(--ink-2)"
                textAnchor="end"
                x="-6"
                y={yOf(tick)}
              >
                {yLabels[i]}
              </text>
            </g>
          ))}
          {x.ticks.map((tick, i) => (
            <text
              className="font-mono"
              fill="var(--ink-2)"
              key={tick}
              textAnchor="middle"
              x={xOf(tick)}
              y={box.height + 14}
            >
              {xLabels[i]}
            </text>
          ))}
          <svg aria-hidden="true" height={box.height} overflow="hidden" width={box.width}>
            {children(box)}
          </svg>
          <text fill="var(--ink-2)" textAnchor="end" x={box.width} y={box.height + 29}>
            {x.title}
          </text>
          <text fill="var(--ink-2)" textAnchor="start" x={-GUTTER} y={box.height + 29}>
            {y.title}
          </text>
        </g>
      </svg>
    </div>
  );
}
