import { FigureNumber } from "#app/components/figure-number.tsx";
import { formatMs, formatVaf, reasonInWords, todoOf } from "#app/components/recording/words.ts";
import { TermLetter } from "#app/components/term-row.tsx";
import {
  columnDecimals,
  formatDay,
  formatDigits,
  formatFull,
  formatRange,
  type Scale,
  scaleOf,
} from "#app/domain/quantity.ts";
import { type ResultWindow, TERMS, type Term } from "#app/engine/types.ts";

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
      <table className="rows [&_:is(th,td)]:pr-2 [&_td]:whitespace-nowrap">
        <thead>
          <tr>
            <th className="r" scope="col">
              no.
            </th>
            <th scope="col">towards</th>
            <th className="r" scope="col">
              onset <span className="unit block">s</span>
            </th>
            <th className="r" scope="col">
              trim <span className="unit block">ms</span>
            </th>
            <th className="r" scope="col">
              moved <span className="unit block">°, ms</span>
            </th>
            <th className="r" scope="col">
              background <span className="unit block">N·m</span>
            </th>
            {columns.map(({ term, scale }) => (
              <th className="r" key={term} scope="col">
                <TermLetter term={term} /> <span className="unit block">{scale.unit}</span>
              </th>
            ))}
            <th className="r" scope="col">
              VAF <span className="unit block">%</span>
            </th>
            <th className="r" scope="col">
              RMS <span className="unit block">N·m</span>
            </th>
          </tr>
        </thead>
        <tbody>
          {rows.map((row) => (
            <WindowRows
              columns={columns}
              isChosen={row.number === chosen}
              key={`${row.window.axis} ${row.number}`}
              onChoose={onChoose}
              row={row}
            />
          ))}
        </tbody>
      </table>
    </div>
  );
}

interface TermColumn {
  term: Term;
  scale: Scale;
  decimals: number;
}

function WindowRows({
  row: { number, window, origin, editedByName, editedAt },
  columns,
  isChosen,
  onChoose,
}: {
  row: FitWindowRow;
  columns: readonly TermColumn[];
  isChosen: boolean;
  onChoose: (number: number) => void;
}) {
  const hasRemarks =
    window.reason !== null ||
    window.flags.length > 0 ||
    origin === "by_hand" ||
    editedByName !== null;
  const look = `${isChosen ? "bg-hover" : ""} ${hasRemarks ? "[&>*]:border-b-0" : ""}`;
  return (
    <>
      <tr aria-current={isChosen ? "true" : undefined} className={look}>
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
        <td className="r num">
          {formatRange(...(window.window_ms.map(formatMs) as [string, string]))}
        </td>
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
      </tr>
      {hasRemarks ? (
        <tr className={isChosen ? "bg-hover" : undefined}>
          <td className="!pt-0" />
          <td className="!pt-0 text-sm !whitespace-normal" colSpan={10}>
            <ul>
              {window.reason === null ? null : (
                <li>Set aside: {reasonInWords(window.reason).text}</li>
              )}
              {origin === "by_hand" ? <li>Added by hand.</li> : null}
              {window.flags.map((flag) => (
                <li
                  className="my-0.5 border-l-2 border-ink pl-1.5"
                  key={flag.code}
                  title={todoOf(flag) ?? undefined}
                >
                  {flag.text}
                </li>
              ))}
              {editedByName ? (
                <li className="text-ink-2">
                  Changed by {editedByName}
                  {editedAt === null ? "" : `, ${formatDay(editedAt)}`}
                </li>
              ) : null}
            </ul>
          </td>
        </tr>
      ) : null}
    </>
  );
}
