import { EstimateStrip } from "#app/charts/estimate-strip.tsx";
import { ShareBar } from "#app/charts/share-bar.tsx";
import { FigureNumber } from "#app/components/figure-number.tsx";
import { FlagList } from "#app/components/recording/window-drawer.tsx";
import { formatVaf } from "#app/components/recording/words.ts";
import { TermName } from "#app/components/term-row.tsx";
import {
  countOf,
  formatDigits,
  formatFull,
  formatNumber,
  halfWidth,
  scaleOf,
  supportedDecimals,
  TERM_NAMES,
} from "#app/domain/quantity.ts";
import { type ResultPooled, type ResultWindow, TERMS } from "#app/engine/types.ts";

/** What all windows of one axis and direction say together: exactly the numbers that were saved. */
export function PooledBlock({
  axisLabel,
  pooled,
  windows,
  level,
  flagsAbove,
}: {
  axisLabel: string;
  pooled: ResultPooled;
  /** The included windows of this axis and direction. */
  windows: readonly ResultWindow[];
  level: number;
  /** Codes of flags that stand above, once for the fit. */
  flagsAbove: ReadonlySet<string>;
}) {
  const percent = Number((100 * level).toFixed(1));
  return (
    <section aria-label={`${axisLabel}, towards ${pooled.direction}`} className="min-w-0">
      <h3>
        {axisLabel}, towards {pooled.direction}
      </h3>
      <div className="wide">
        <table className="rows">
          <thead>
            <tr>
              <th scope="col">
                <span className="num">{countOf(pooled.windows, "window")}</span>
              </th>
              <th
                className="r"
                scope="col"
                title={`Mean over the windows ± half of its ${percent} % t interval`}
              >
                mean ± {percent} % t
              </th>
              <th className="hidden w-1/4 sm:table-cell" scope="col">
                each window
              </th>
              <th
                className="r"
                scope="col"
                title="One least-squares fit over the stacked windows, with its percentile bootstrap over windows"
              >
                stacked, bootstrap
              </th>
              <th className="r" scope="col" title="One fit on the mean trace of the windows">
                ensemble
              </th>
            </tr>
          </thead>
          <tbody>
            {TERMS.map((term) => {
              const { window_mean: mean, window_sd: sd, t, estimate, bootstrap } = pooled[term];
              const { factor, unit } = scaleOf(term, [mean, estimate]);
              const half = halfWidth(t);
              const decimals = supportedDecimals(
                scaled(mean ?? estimate, factor),
                scaled(half, factor),
              );
              return (
                <tr key={term}>
                  <th scope="row">
                    <TermName term={term} unit={unit} />
                  </th>
                  <td className="r">
                    <FigureNumber
                      decimals={decimals}
                      factor={factor}
                      interval={t}
                      showInterval
                      value={mean}
                    />
                    <span className="unit block" title={formatFull(sd)}>
                      SD{" "}
                      <span className="font-mono">
                        {formatNumber(scaled(sd, factor), decimals)}
                      </span>
                    </span>
                  </td>
                  <td className="hidden sm:table-cell">
                    <EstimateStrip
                      interval={t}
                      label={`${TERM_NAMES[term]} of each window, with the mean and its interval`}
                      mean={mean}
                      term={term}
                      values={windows.flatMap((window) => window[term] ?? [])}
                    />
                  </td>
                  <td className="r">
                    <FigureNumber decimals={decimals} factor={factor} value={estimate} />
                    <span className="unit block font-mono">
                      {bootstrap ? (
                        <span title={bootstrap.map(formatFull).join(" to ")}>
                          {formatNumber(bootstrap[0] * factor, decimals)} to{" "}
                          {formatNumber(bootstrap[1] * factor, decimals)}
                        </span>
                      ) : (
                        "–"
                      )}
                    </span>
                  </td>
                  <td className="r">
                    <FigureNumber
                      decimals={decimals}
                      factor={factor}
                      value={pooled.ensemble[term]}
                    />
                  </td>
                </tr>
              );
            })}
          </tbody>
        </table>
      </div>
      <dl className="my-1.5 flex flex-wrap gap-x-4 text-sm text-ink-2">
        <Fact
          name="VAF"
          text={`${formatVaf(pooled.vaf_pct)} %`}
          title={formatFull(pooled.vaf_pct)}
        />
        <Fact
          name="uncentred"
          text={`${formatVaf(pooled.vaf_uncentred_pct)} %`}
          title={formatFull(pooled.vaf_uncentred_pct)}
        />
        <Fact
          name="torque’s delay"
          text={`${formatDigits(pooled.lag_estimate_ms, 2)} ms`}
          title={formatFull(pooled.lag_estimate_ms)}
        />
        <Fact
          name="K from window to window"
          text={formatNumber(pooled.order_lag1, 2)}
          title={formatFull(pooled.order_lag1)}
        />
        {pooled.correlation ? (
          <Fact
            name="correlation K–B, K–I, B–I"
            text={[
              pooled.correlation[0]?.[1],
              pooled.correlation[0]?.[2],
              pooled.correlation[1]?.[2],
            ]
              .map((value) => formatNumber(value, 2))
              .join(", ")}
            title="Of the estimates in the stacked fit"
          />
        ) : null}
      </dl>
      <div className="max-w-md">
        <ShareBar share={pooled.share} />
      </div>
      {pooled.late ? (
        <p className="mt-2 text-sm text-ink-2">
          After the window the torque leaves the model at{" "}
          <span className="font-mono">{formatDigits(pooled.late.latency_ms, 2)} ms</span>, by{" "}
          <span className="font-mono">{formatDigits(pooled.late.peak, 2)} N·m</span> at{" "}
          <span className="font-mono">{formatDigits(pooled.late.peak_ms, 3)} ms</span>: an apparent
          stiffness of{" "}
          <span className="font-mono">
            {formatDigits(pooled.late.apparent_stiffness, 2)} N·m/rad
          </span>
          . Without EMG, yielding of the muscle looks the same.
        </p>
      ) : null}
      <FlagList flags={pooled.flags.filter(({ code }) => !flagsAbove.has(code))} />
      {pooled.robustness ? <Robustness tried={pooled.robustness} /> : null}
    </section>
  );
}

function Fact({ name, text, title }: { name: string; text: string; title: string }) {
  return (
    <div className="flex gap-1" title={title}>
      <dt>{name}</dt>
      <dd className="font-mono text-ink">{text}</dd>
    </div>
  );
}

/** The stiffness over all choices tried, as one sentence and as a table of both choices. */
function Robustness({ tried }: { tried: NonNullable<ResultPooled["robustness"]> }) {
  const values = tried.flatMap(({ K }) => K ?? []);
  const ends = [...new Set(tried.map((each) => each.window_end_ms))].sort((a, b) => a - b);
  const cutoffs = [...new Set(tried.map((each) => each.cutoff_hz))];
  if (values.length === 0) return null;
  const low = Math.min(...values);
  const high = Math.max(...values);
  return (
    <details className="mt-2">
      <summary className="min-h-6">
        K moves from <span className="num">{formatDigits(low, 3)}</span> to{" "}
        <span className="num">{formatDigits(high, 3)}</span> N·m/rad over the choices tried
      </summary>
      <div className="wide max-w-md">
        <table className="rows">
          <caption className="sr-only">K in N·m/rad by window end and cut-off</caption>
          <thead>
            <tr>
              <th scope="col">window end, ms</th>
              {cutoffs.map((cutoff) => (
                <th className="r" key={cutoff} scope="col">
                  {cutoff === null ? "no filter" : `${cutoff} Hz`}
                </th>
              ))}
            </tr>
          </thead>
          <tbody>
            {ends.map((end) => (
              <tr key={end}>
                <th className="num" scope="row">
                  {end}
                </th>
                {cutoffs.map((cutoff) => {
                  const K =
                    tried.find((each) => each.window_end_ms === end && each.cutoff_hz === cutoff)
                      ?.K ?? null;
                  return (
                    <td
                      className="r num"
                      key={cutoff}
                      style={{
                        background: K === null ? undefined : shade((K - low) / (high - low || 1)),
                      }}
                      title={formatFull(K)}
                    >
                      {formatDigits(K, 3)}
                    </td>
                  );
                })}
              </tr>
            ))}
          </tbody>
        </table>
      </div>
    </details>
  );
}

/** From the paper to a light wash of ink: the surface, without a colour that means something else. */
function shade(share: number): string {
  return `color-mix(in srgb, var(--step-1) ${Math.round(100 * share)}%, transparent)`;
}

function scaled(value: number | null, factor: number): number | null {
  return value === null ? null : value * factor;
}
