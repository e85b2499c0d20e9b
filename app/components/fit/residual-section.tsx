import { type ReactNode, useEffect, useMemo, useRef } from "react";
import {
  ResidualAutocorrelation,
  ResidualDistribution,
  ResidualOverAngle,
  ResidualOverTime,
  type ResidualTrace,
} from "#app/charts/residual-plots.tsx";
import { autocorrelation, binsOf } from "#app/charts/residual-statistics.ts";
import { formatNumber } from "#app/domain/quantity.ts";
import { PlotTable } from "./plot-table.tsx";

/** The residuals of one axis' windows, drawn from the raw file. */
export function ResidualSection({
  traces,
  sampleMs,
  onSeen,
  children,
}: {
  traces: readonly (ResidualTrace & { number: number })[];
  sampleMs: number;
  /** The plots have stood on the screen. */
  onSeen: () => void;
  children: ReactNode;
}) {
  const section = useRef<HTMLDivElement>(null);
  const seen = useRef(onSeen);
  seen.current = onSeen;
  useEffect(() => {
    const element = section.current;
    if (element === null || traces.length === 0) return;
    const observer = new IntersectionObserver((entries) => {
      if (entries.some((entry) => entry.isIntersecting)) seen.current();
    });
    observer.observe(element);
    return () => observer.disconnect();
  }, [traces.length]);

  const residuals = useMemo(() => traces.map((trace) => trace.residualNm), [traces]);
  return (
    <section aria-labelledby="residuals">
      <h2 className="mb-1" id="residuals">
        Residuals
      </h2>
      <div className="grid gap-x-6 gap-y-4 lg:grid-cols-2" ref={section}>
        <Plot
          table={
            <PlotTable
              heads={["window", "ms", "°", "N·m"]}
              of="Residual over time and angle"
              rows={() =>
                traces.flatMap((trace) =>
                  Array.from(trace.timeMs, (ms, i) => [
                    String(trace.number),
                    formatNumber(ms, 2),
                    formatNumber(trace.angleDeg[i], 4),
                    formatNumber(trace.residualNm[i], 6),
                  ]),
                )
              }
            />
          }
          title="Over time"
          words="What all windows share is not noise: late, it is a reflex or a voluntary torque."
        >
          <ResidualOverTime traces={traces} />
        </Plot>
        <Plot
          table={null}
          title="Over angle"
          words="A bend is a stiffness that changes with the angle."
        >
          <ResidualOverAngle traces={traces} />
        </Plot>
        <Plot
          table={
            <PlotTable
              heads={["from N·m", "to N·m", "samples"]}
              of="Distribution of the residual"
              rows={() =>
                binsOf(residuals).map((bin) => [
                  formatNumber(bin.low, 6),
                  formatNumber(bin.high, 6),
                  String(bin.count),
                ])
              }
            />
          }
          title="Distribution"
          words="Two humps or a long tail: windows of different kinds."
        >
          <ResidualDistribution traces={traces} />
        </Plot>
        <Plot
          table={
            <PlotTable
              heads={["lag ms", "correlation"]}
              of="Autocorrelation of the residual"
              rows={() =>
                autocorrelation(residuals, 40).map((value, k) => [
                  formatNumber(k * sampleMs, 2),
                  formatNumber(value, 4),
                ])
              }
            />
          }
          title="Autocorrelation"
          words="Filtered residuals go together over many samples: the interval is therefore made over windows."
        >
          <ResidualAutocorrelation sampleMs={sampleMs} traces={traces} />
        </Plot>
      </div>
      {children}
    </section>
  );
}

function Plot({
  title,
  words,
  table,
  children,
}: {
  title: string;
  words: string;
  table: ReactNode;
  children: ReactNode;
}) {
  return (
    <figure className="m-0 min-w-0">
      <figcaption className="mb-1">
        {title} <span className="text-sm text-ink-2">{words}</span>
      </figcaption>
      {children}
      {table}
    </figure>
  );
}
