import { useMemo } from "react";
import { dotsPath, linePath } from "./path.ts";
import { PlotFrame } from "./plot-frame.tsx";
import { autocorrelation, type Bin, binsOf } from "./residual-statistics.ts";
import { roundTicks, spread, threeTicks } from "./ticks.ts";

/** One window's residual over time and angle. */
export interface ResidualTrace {
  /** After the onset, ms. */
  timeMs: Float64Array;
  /** From the baseline, degrees. */
  angleDeg: Float64Array;
  residualNm: Float64Array;
}

const HEIGHT = 190;
const BEFORE = 340;

function residualAxis(traces: readonly ResidualTrace[]) {
  const [low, high] = spread(traces.map((trace) => trace.residualNm)) ?? [-1, 1];
  const reach = Math.max(Math.abs(low), Math.abs(high));
  return { title: "N·m", ...threeTicks(-reach, reach) };
}

/** All windows over each other, against time: what all of them share is not noise. */
export function ResidualOverTime({ traces }: { traces: readonly ResidualTrace[] }) {
  const y = useMemo(() => residualAxis(traces), [traces]);
  const [low, high] = spanOf(traces.map((trace) => trace.timeMs));
  return (
    <PlotFrame
      before={BEFORE}
      height={HEIGHT}
      label="Residual against time, all windows over each other"
      x={{ title: "ms after onset", low, high, ticks: roundTicks(low, high) }}
      y={y}
    >
      {({ range, width, height }) =>
        traces.map((trace, i) => (
          <path
            d={linePath(trace.timeMs, trace.residualNm, range, width, height)}
            fill="none"
            // biome-ignore lint/suspicious/noArrayIndexKey: windows keep their order and have no name here.
            key={i}
            opacity={traces.length > 8 ? 0.5 : 0.8}
            stroke="var(--ink)"
          />
        ))
      }
    </PlotFrame>
  );
}

/** Against angle: a bend here is a stiffness that changes with the angle. */
export function ResidualOverAngle({ traces }: { traces: readonly ResidualTrace[] }) {
  const y = useMemo(() => residualAxis(traces), [traces]);
  const [low, high] = spread(traces.map((trace) => trace.angleDeg)) ?? [-1, 1];
  return (
    <PlotFrame
      before={BEFORE}
      height={HEIGHT}
      label="Residual against angle"
      x={{ title: "° from the baseline", low, high, ticks: roundTicks(low, high) }}
      y={y}
    >
      {({ range, width, height }) =>
        traces.map((trace, i) => (
          <path
            d={dotsPath(trace.angleDeg, trace.residualNm, range, width, height)}
            // biome-ignore lint/suspicious/noArrayIndexKey: windows keep their order and have no name here.
            key={i}
            opacity="0.6"
            stroke="var(--ink)"
            strokeLinecap="round"
            strokeWidth="2.4"
          />
        ))
      }
    </PlotFrame>
  );
}

/** How often each size stands in the residual. */
export function ResidualDistribution({ traces }: { traces: readonly ResidualTrace[] }) {
  const bins = useMemo(() => binsOf(traces.map((trace) => trace.residualNm)), [traces]);
  const reach = bins.at(-1)?.high ?? 1;
  const most = Math.max(1, ...bins.map((bin) => bin.count));
  const y = threeTicks(0, most * 1.05);
  const x = threeTicks(-reach, reach);
  return (
    <PlotFrame
      before={BEFORE}
      height={HEIGHT}
      label="Distribution of the residual"
      x={{ title: "N·m", ...x }}
      y={{ ...y, title: "samples", low: 0 }}
    >
      {({ range, width, height }) =>
        bins.map((bin) => (
          <Bar
            bin={bin}
            height={height}
            key={bin.low}
            most={range.high}
            range={range}
            width={width}
          />
        ))
      }
    </PlotFrame>
  );
}

function Bar({
  bin,
  range,
  width,
  height,
  most,
}: {
  bin: Bin;
  range: { left: number; right: number };
  width: number;
  height: number;
  most: number;
}) {
  const xOf = (value: number) => ((value - range.left) / (range.right - range.left)) * width;
  const high = (bin.count / most) * height;
  return (
    <rect
      fill="var(--step-3)"
      height={high}
      stroke="var(--ink)"
      width={Math.max(1, xOf(bin.high) - xOf(bin.low) - 1)}
      x={xOf(bin.low) + 0.5}
      y={height - high}
    />
  );
}

const MOST_LAGS = 40;

/**
 * How each sample goes with those after it, with ± 2 / √n for independent samples. Filtered
 * residuals are never independent: that is why no interval here is made of them.
 */
export function ResidualAutocorrelation({
  traces,
  sampleMs,
}: {
  traces: readonly ResidualTrace[];
  sampleMs: number;
}) {
  const values = useMemo(
    () =>
      autocorrelation(
        traces.map((trace) => trace.residualNm),
        MOST_LAGS,
      ),
    [traces],
  );
  const samples = traces.reduce((sum, trace) => sum + trace.residualNm.length, 0);
  const band = samples > 0 ? 2 / Math.sqrt(samples) : 0;
  const lastMs = Math.max(1, values.length - 1) * sampleMs;
  return (
    <PlotFrame
      before={BEFORE}
      height={HEIGHT}
      label="Autocorrelation of the residual"
      x={{ title: "lag, ms", low: 0, high: lastMs * 1.02, ticks: roundTicks(0, lastMs) }}
      y={{ title: "correlation", low: -1.08, high: 1.08, ticks: [-1, 0, 1] }}
    >
      {({ range, width, height }) => {
        const xOf = (ms: number) => (ms / range.right) * width;
        const yOf = (value: number) =>
          height - ((value - range.low) / (range.high - range.low)) * height;
        return (
          <>
            <rect fill="var(--hover)" height={yOf(-band) - yOf(band)} width={width} y={yOf(band)} />
            <path d={`M0 ${yOf(0)}H${width}`} stroke="var(--rule)" />
            <path
              d={values
                .map(
                  (value, k) =>
                    `M${xOf(k * sampleMs).toFixed(1)} ${yOf(0)}V${yOf(value).toFixed(1)}`,
                )
                .join("")}
              stroke="var(--ink)"
              strokeWidth="1.25"
            />
          </>
        );
      }}
    </PlotFrame>
  );
}

function spanOf(columns: readonly Float64Array[]): [number, number] {
  let low = Number.POSITIVE_INFINITY;
  let high = Number.NEGATIVE_INFINITY;
  for (const column of columns) {
    low = Math.min(low, column[0] ?? low);
    high = Math.max(high, column[column.length - 1] ?? high);
  }
  return high > low ? [low, high] : [0, 1];
}
