import type { ReactNode } from "react";
import { Link } from "react-router";
import {
  columnDecimals,
  formatChange,
  formatFull,
  formatNumber,
  halfWidth,
  type Scale,
} from "#app/domain/quantity.ts";
import type { CellState } from "#app/domain/recording.ts";
import type { Interval } from "#app/engine/types.ts";
import { StateMark } from "./state-mark.tsx";

export interface GridValue {
  mean: number;
  t: Interval | null;
  windows: number;
  state: CellState;
  isVerified: boolean;
  recordingIds: string[];
}

interface Summary {
  n: number;
  mean: number | null;
  interval: Interval | null;
}

/**
 * Participants × conditions in numbers, on one decimal column; below them the mean over
 * participants and the change from the baseline. What is not approved carries its state's mark.
 */
export function ValueGrid({
  caption,
  conditions,
  rows,
  means,
  changes,
  scale,
  baselineName,
}: {
  caption: string;
  conditions: readonly { id: string; name: string }[];
  rows: readonly { participantId: string; code: string; cells: (GridValue | null)[] }[];
  means: readonly Summary[];
  changes: readonly (Summary | null)[];
  scale: Scale;
  baselineName: string | null;
}) {
  const shown = (value: number | null) => (value === null ? null : value * scale.factor);
  const decimals = columnDecimals([
    ...rows.flatMap((row) =>
      row.cells.map((cell) => ({
        value: shown(cell?.mean ?? null),
        half: shown(halfWidth(cell?.t ?? null)),
      })),
    ),
    ...means.map((mean) => ({ value: shown(mean.mean), half: shown(halfWidth(mean.interval)) })),
  ]);
  const number = (value: number | null) => formatNumber(shown(value), decimals);
  const half = (interval: Interval | null) => {
    const width = halfWidth(interval);
    return width === null ? null : (
      <>
        <span className="mx-[3px] text-ink-2">±</span>
        {number(width)}
      </>
    );
  };

  return (
    <div className="wide">
      <table className="rows [&_:is(th,td)]:pr-4 [&_td:first-of-type]:pl-3 [&_[scope=row]]:sticky [&_[scope=row]]:left-0 [&_[scope=row]]:z-1 [&_[scope=row]]:bg-paper">
        <caption className="sr-only">{caption}</caption>
        <thead>
          <tr>
            <th scope="col">
              <span className="sr-only">participant</span>
            </th>
            {conditions.map((condition) => (
              <th className="r" key={condition.id} scope="col">
                {condition.name}
              </th>
            ))}
          </tr>
        </thead>
        <tbody>
          {rows.map((row) => (
            <tr key={row.participantId}>
              <th className="num" scope="row">
                {row.code}
              </th>
              {row.cells.map((cell, place) => (
                <td className="r num" key={conditions[place]?.id ?? place}>
                  {cell === null ? (
                    <>
                      <span aria-hidden="true" className="text-ink-2">
                        –
                      </span>
                      <span className="sr-only">no value</span>
                    </>
                  ) : (
                    <ValueText cell={cell}>
                      {number(cell.mean)}
                      {half(cell.t)}
                    </ValueText>
                  )}
                </td>
              ))}
            </tr>
          ))}
        </tbody>
        <tfoot>
          <tr className="border-t border-ink">
            <th className="font-semibold!" scope="row">
              mean
            </th>
            {means.map((mean, place) => (
              <td
                className="r num"
                key={conditions[place]?.id ?? place}
                title={`${formatFull(mean.mean)}, n = ${mean.n}`}
              >
                <span className="font-semibold">{mean.n < 2 ? "–" : number(mean.mean)}</span>
                {half(mean.interval)}
              </td>
            ))}
          </tr>
          <tr>
            <th className="text-ink-2" scope="row">
              n<span className="sr-only"> participants</span>
            </th>
            {means.map((mean, place) => (
              <td className="r num" key={conditions[place]?.id ?? place}>
                {mean.n}
              </td>
            ))}
          </tr>
          {baselineName === null ? null : (
            <tr>
              <th className="text-ink-2" scope="row">
                change<span className="sr-only"> from {baselineName}</span>
              </th>
              {changes.map((change, place) => (
                <td
                  className="r num"
                  key={conditions[place]?.id ?? place}
                  title={
                    change
                      ? `${formatFull(change.mean)}, in ${change.n} participants with both`
                      : undefined
                  }
                >
                  {change && change.n >= 2 ? (
                    <>
                      {formatChange(shown(change.mean), decimals)}
                      {half(change.interval)}
                    </>
                  ) : null}
                </td>
              ))}
            </tr>
          )}
        </tfoot>
      </table>
    </div>
  );
}

function ValueText({ cell, children }: { cell: GridValue; children: ReactNode }) {
  const title = `${formatFull(cell.mean)}, ${cell.windows} windows, ${cell.state}${cell.isVerified ? "" : ", unverified"}`;
  const [only] = cell.recordingIds;
  const number = (
    <>
      {cell.state === "approved" ? null : (
        <span className="absolute right-[calc(100%-2px)] scale-70">
          <StateMark state={cell.state} />
        </span>
      )}
      {children}
      {cell.isVerified ? null : <span className="unit block font-sans">unverified</span>}
    </>
  );
  return cell.recordingIds.length === 1 && only ? (
    <Link
      className="relative hover:underline hover:decoration-edge hover:underline-offset-3"
      title={title}
      to={`/recordings/${only}`}
    >
      {number}
    </Link>
  ) : (
    <span className="relative" title={title}>
      {number}
    </span>
  );
}
