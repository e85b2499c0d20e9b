import type { ReactNode } from "react";
import { ShareBar } from "#app/charts/share-bar.tsx";
import { FlagNote } from "#app/components/flag.tsx";
import { TermRow } from "#app/components/term-row.tsx";
import { countOf, formatDigits, formatFull, formatNumber } from "#app/domain/quantity.ts";
import { type Flag, type ResultPooled, type ResultWindow, TERMS } from "#app/engine/types.ts";
import { formatVaf, reasonInWords, spanInWords, todoOf } from "./words.ts";

/** The chosen window: its fit beside that of all windows like it, and what to know about it. */
export function WindowDrawer({
  number,
  window,
  isByHand,
  share,
  pooled,
  isPooling,
  flagsAbove,
  level,
  actions,
}: {
  number: number;
  /** As fitted now; null until the engine has answered. */
  window: ResultWindow | null;
  isByHand: boolean;
  share: { K: number | null; B: number | null; I: number | null } | null;
  /** All windows of this axis and direction. */
  pooled: ResultPooled | null;
  /** The pooled values are of an earlier state and on their way. */
  isPooling: boolean;
  /** Codes of flags that the page says already, once for all windows. */
  flagsAbove: ReadonlySet<string>;
  /** Of the interval, 0.95. */
  level: number;
  actions: ReactNode;
}) {
  const reason = window?.reason ? reasonInWords(window.reason) : null;
  const percent = Number((100 * level).toFixed(1));
  return (
    <>
      <div className="min-h-0 flex-1 lg:overflow-y-auto">
        <h2 className="mb-1">
          Window {number}
          {window?.direction ? `, towards ${window.direction}` : ""}
        </h2>
        <p className="text-sm text-ink-2">
          onset{" "}
          <span className="font-mono">{window ? formatNumber(window.onset_s, 3) : "–"} s</span>
          {window?.amplitude_deg != null ? (
            <>
              , moved{" "}
              <span className="font-mono" title={`${formatFull(window.amplitude_deg)}°`}>
                {formatDigits(window.amplitude_deg, 2)}°
              </span>
              {window.duration_ms === null ? null : (
                <>
                  {" in "}
                  <span className="font-mono">{formatNumber(window.duration_ms, 0)} ms</span>
                </>
              )}
            </>
          ) : null}
          , trimmed to{" "}
          <span className="font-mono">{window ? spanInWords(window.window_ms) : "–"}</span>
          {isByHand ? ", added by hand" : ""}
        </p>
        {reason ? <FlagNote text={reason.text} todo={reason.todo ?? undefined} /> : null}
        <div className="my-2">
          <table
            aria-busy={isPooling}
            className="rows [&_:is(th,td)]:pr-0 [&_td]:pl-3 [&[aria-busy=true]_td:last-child]:opacity-60"
          >
            <thead>
              <tr>
                <th>
                  <span className="sr-only">term</span>
                </th>
                <th className="r" scope="col">
                  this one
                </th>
                <th
                  className="r"
                  scope="col"
                  title={`Mean of the windows ± half its ${percent} % t interval`}
                >
                  {pooled ? countOf(pooled.windows, "window") : "windows"}
                </th>
              </tr>
            </thead>
            <tbody>
              {TERMS.map((term) => (
                <TermRow
                  key={term}
                  pooled={{
                    value: pooled?.[term].window_mean ?? null,
                    interval: pooled?.[term].t ?? null,
                  }}
                  term={term}
                  value={window?.[term] ?? null}
                />
              ))}
              <QualityRow
                all={formatVaf(pooled?.vaf_pct ?? null)}
                fullAll={pooled?.vaf_pct}
                fullOne={window?.vaf_pct}
                name="VAF"
                one={formatVaf(window?.vaf_pct ?? null)}
                unit="%"
              />
              <QualityRow
                fullOne={window?.rms_residual}
                name="Residual, RMS"
                one={formatDigits(window?.rms_residual, 2)}
                unit="N·m"
              />
              <QualityRow
                fullOne={window?.condition_number}
                name="Condition number"
                one={formatDigits(window?.condition_number, 2)}
              />
              <QualityRow
                fullOne={window?.background_torque}
                name="Background torque"
                one={formatDigits(window?.background_torque, 2)}
                unit="N·m"
              />
            </tbody>
          </table>
          <p className="mt-1 text-sm text-ink-2">
            Over windows: their mean ± its {percent} % t interval.
          </p>
        </div>
        {share ? (
          <div className="my-2">
            <p className="mb-1 text-sm text-ink-2">Share of the torque</p>
            <ShareBar share={share} />
          </div>
        ) : null}
        <FlagList flags={window?.flags.filter(({ code }) => !flagsAbove.has(code)) ?? []} />
      </div>
      {actions ? <div className="flex flex-wrap gap-2 pt-3">{actions}</div> : null}
    </>
  );
}

function QualityRow({
  name,
  unit,
  one,
  all = "",
  fullOne,
  fullAll,
}: {
  name: string;
  unit?: string;
  one: string;
  all?: string;
  fullOne?: number | null | undefined;
  fullAll?: number | null | undefined;
}) {
  return (
    <tr>
      <th scope="row">
        {name} {unit ? <span className="unit">{unit}</span> : null}
      </th>
      <td className="r num" title={formatFull(fullOne)}>
        {one}
      </td>
      <td className="r num" title={all === "" ? undefined : formatFull(fullAll)}>
        {all}
      </td>
    </tr>
  );
}

/** Each flag with what to do about it. */
export function FlagList({ flags }: { flags: readonly Flag[] }) {
  return flags.map((flag) => (
    <FlagNote key={flag.code + flag.text} text={flag.text} todo={todoOf(flag) ?? undefined} />
  ));
}
