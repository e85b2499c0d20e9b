import { FigureNumber } from "#app/components/figure-number.tsx";
import {
  formatMs,
  formatVaf,
  reasonInWords,
  spanInWords,
  todoOf,
} from "#app/components/recording/words.ts";
import { TermLetter } from "#app/components/term-row.tsx";
import {
  columnDecimals,
  formatDay,
  formatDigits,
  formatFull,
  scaleOf,
} from "#app/domain/quantity.ts";
import { type ResultWindow, TERMS } from "#app/engine/types.ts";

/** A saved window: what was computed, and who had a hand in it. */
export interface FitWindowRow {
  /** Within its axis, from 1. */
  number: number;
  window: ResultWindow;
  origin: "found" | "by_hand";
  editedByName: string | null;
  editedAt: number | null;
}

/** Every window of the fit in time order, those set aside with their reason. */
export function WindowTable({
  rows,
  chosen,
  onChoose,
}: {
  rows: readonly FitWindowRow[];
  chosen: number | null;
  onChoose: (number: number) => void;
}) {
  const columns = TERMS.map((term) => {
    const values = rows.map(({ window }) => window[term]);
    const scale = scaleOf(term, values);
    return {
      term,
      scale,
      decimals: columnDecimals(
        values.map((value) => ({
          value: value === null ? null : value * scale.factor,
          half: null,
        })),
      ),
    };
  });
  return (
    <div className="wide">
      <table className="rows [&_:is(th,td)]:pr-3">
        <thead>
          <tr>
            <th className="r" scope="col">
              window
            </th>
            <th scope="col">towards</th>
            <th className="r" scope="col">
              onset s
            </th>
            <th className="r" scope="col">
              trim
            </th>
            <th className="r" scope="col">
              moved °, ms
            </th>
            <th className="r" scope="col">
              background N·m
            </th>
            {columns.map(({ term, scale }) => (
              <th className="r" key={term} scope="col">
                <TermLetter term={term} /> {scale.unit}
              </th>
            ))}
            <th className="r" scope="col">
              VAF %
            </th>
            <th className="r" scope="col">
              RMS N·m
            </th>
            <th scope="col">remarks</th>
          </tr>
        </thead>
        <tbody>
          {rows.map(({ number, window, origin, editedByName, editedAt }) => (
            <tr
              aria-selected={number === chosen}
              className="aria-selected:bg-hover"
              key={`${window.axis} ${number}`}
            >
              <th className="r" scope="row">
                {window.included ? (
                  <button
                    className="num min-h-6 min-w-6 underline decoration-edge underline-offset-3"
                    onClick={() => onChoose(number)}
                    title="Show this window’s torque"
                    type="button"
                  >
                    {number}
                  </button>
                ) : (
                  <span className="num text-ink-2">{number}</span>
                )}
              </th>
              <td>{window.direction ?? "–"}</td>
              <td className="r num" title={formatFull(window.onset_s)}>
                {window.onset_s.toFixed(3)}
              </td>
              <td className="r num">{spanInWords(window.window_ms)}</td>
              <td className="r num">
                {formatDigits(window.amplitude_deg, 2)},{" "}
                {window.duration_ms === null ? "–" : formatMs(Math.round(window.duration_ms))}
              </td>
              <td className="r num" title={formatFull(window.background_torque)}>
                {formatDigits(window.background_torque, 2)}
              </td>
              {columns.map(({ term, scale, decimals }) => (
                <td className="r" key={term}>
                  <FigureNumber decimals={decimals} factor={scale.factor} value={window[term]} />
                </td>
              ))}
              <td className="r num" title={formatFull(window.vaf_pct)}>
                {formatVaf(window.vaf_pct)}
              </td>
              <td className="r num" title={formatFull(window.rms_residual)}>
                {formatDigits(window.rms_residual, 2)}
              </td>
              <td className="min-w-56 text-sm">
                {window.reason === null ? null : (
                  <>Set aside: {reasonInWords(window.reason).text} </>
                )}
                {window.flags.map((flag) => (
                  <span
                    className="mr-1.5 border-l-2 border-ink pl-1"
                    key={flag.code}
                    title={[flag.text, todoOf(flag)].filter(Boolean).join(" ")}
                  >
                    {flag.code.replaceAll("_", " ")}
                  </span>
                ))}
                {origin === "by_hand" ? <>added by hand </> : null}
                {editedByName ? (
                  <span className="text-ink-2">
                    {editedByName}
                    {editedAt === null ? null : `, ${formatDay(editedAt)}`}
                  </span>
                ) : null}
              </td>
            </tr>
          ))}
        </tbody>
      </table>
    </div>
  );
}
