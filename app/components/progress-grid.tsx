import { type KeyboardEvent, useEffect, useState } from "react";
import { Link } from "react-router";
import { type Cell, cellKey } from "#app/domain/cell.ts";
import { countOf } from "#app/domain/quantity.ts";
import { StateMark } from "./state-mark.tsx";

interface Position {
  row: number;
  /** Counted over all axes: the grids stand side by side and are walked as one. */
  column: number;
}

/**
 * Participants × conditions, one grid for each axis; every cell in its state. The way in: a cell
 * with one recording leads to it, one with several to their list. Arrow keys walk over all cells,
 * and one Tab passes the whole grid.
 */
export function ProgressGrid({
  participants,
  conditions,
  axes,
  cells,
  listHref,
}: {
  participants: readonly { id: string; code: string }[];
  conditions: readonly { id: string; name: string; isBaseline: boolean; isActive: boolean }[];
  axes: readonly { name: string; label: string }[];
  /** By `cellKey`; a cell that is not there is "nothing". */
  cells: ReadonlyMap<string, Cell>;
  /** Where the recordings of a cell with several stand. */
  listHref: (participantId: string, conditionId: string) => string;
}) {
  // Without scripts every link is a tab stop of its own.
  const [at, setAt] = useState<Position | null>(null);
  useEffect(() => setAt({ row: 0, column: 0 }), []);
  const columns = axes.length * conditions.length;

  function walk(event: KeyboardEvent<HTMLTableElement>) {
    if (!at || event.altKey || event.metaKey) return;
    const next = nextPosition(at, event.key, event.ctrlKey, participants.length, columns);
    if (!next) return;
    event.preventDefault();
    setAt(next);
    event.currentTarget
      .closest("[data-grids]")
      ?.querySelector<HTMLElement>(`[data-cell="${next.row},${next.column}"]`)
      ?.focus();
  }

  return (
    <div
      className="grid grid-cols-[repeat(auto-fit,minmax(min(100%,26rem),1fr))] gap-x-10 gap-y-6"
      data-grids
    >
      {axes.map((axis, axisIndex) => (
        <div className="wide" key={axis.name}>
          <table
            aria-label={axis.label}
            className="w-full table-fixed border-collapse"
            onKeyDown={walk}
            // biome-ignore lint/a11y/noNoninteractiveElementToInteractiveRole: a table walked with arrow keys is a grid
            role="grid"
            style={{ minWidth: 48 + 52 * conditions.length }}
          >
            <caption className="border-b border-ink pb-1 text-center text-sm font-semibold">
              {axis.label}
            </caption>
            <thead>
              <tr>
                <th className="w-12 border-b border-rule" scope="col">
                  <span className="sr-only">participant</span>
                </th>
                {conditions.map((condition) => (
                  <th
                    className="border-b border-rule px-0.5 py-1 align-bottom text-sm leading-4 font-normal text-ink-2"
                    key={condition.id}
                    scope="col"
                  >
                    {condition.name}
                  </th>
                ))}
              </tr>
            </thead>
            <tbody>
              {participants.map((participant, row) => (
                <tr className="hover:bg-hover" key={participant.id}>
                  <th className="num border-b border-rule text-left leading-[25px]" scope="row">
                    {participant.code}
                  </th>
                  {conditions.map((condition, conditionIndex) => {
                    const column = axisIndex * conditions.length + conditionIndex;
                    const isAt = at?.row === row && at.column === column;
                    return (
                      <GridCell
                        cell={cells.get(cellKey(participant.id, condition.id, axis.name))}
                        dataCell={`${row},${column}`}
                        href={listHref(participant.id, condition.id)}
                        key={condition.id}
                        name={`${participant.code}, ${condition.name}, ${axis.label}`}
                        onFocus={() => setAt({ row, column })}
                        tabIndex={at === null ? undefined : isAt ? 0 : -1}
                      />
                    );
                  })}
                </tr>
              ))}
            </tbody>
          </table>
        </div>
      ))}
    </div>
  );
}

function GridCell({
  cell,
  href,
  name,
  dataCell,
  tabIndex,
  onFocus,
}: {
  cell: Cell | undefined;
  href: string;
  name: string;
  dataCell: string;
  tabIndex: number | undefined;
  onFocus: () => void;
}) {
  if (!cell) {
    return (
      <td
        className="h-[26px] border-b border-rule p-0 text-center"
        data-cell={dataCell}
        onFocus={onFocus}
        // biome-ignore lint/a11y/noNoninteractiveElementToInteractiveRole: the arrow keys walk over empty cells too
        role="gridcell"
        tabIndex={tabIndex}
        title={`${name}: nothing`}
      >
        <StateMark silent state="nothing" />
        <span className="sr-only">{name}: nothing</span>
      </td>
    );
  }
  const [only] = cell.recordingIds;
  const count = cell.recordingIds.length;
  return (
    <td className="border-b border-rule p-0 text-center">
      <Link
        className="relative flex h-[25px] w-full items-center justify-center"
        data-cell={dataCell}
        onFocus={onFocus}
        tabIndex={tabIndex}
        title={`${name}: ${cell.state}`}
        to={count === 1 && only ? `/recordings/${only}` : href}
      >
        <StateMark silent state={cell.state} />
        {count > 1 ? (
          <span aria-hidden="true" className="num absolute left-[calc(50%+10px)]">
            {count}
          </span>
        ) : null}
        <span className="sr-only">
          {name}: {cell.state}
          {count > 1 ? `, ${countOf(count, "recording")}, the least advanced of them` : null}
        </span>
      </Link>
    </td>
  );
}

/** Where an arrow key, Home or End leads; null for every other key. */
export function nextPosition(
  at: Position,
  key: string,
  isFar: boolean,
  rows: number,
  columns: number,
): Position | null {
  const within = (value: number, count: number) => Math.min(count - 1, Math.max(0, value));
  switch (key) {
    case "ArrowLeft":
      return { row: at.row, column: within(at.column - 1, columns) };
    case "ArrowRight":
      return { row: at.row, column: within(at.column + 1, columns) };
    case "ArrowUp":
      return { row: within(at.row - 1, rows), column: at.column };
    case "ArrowDown":
      return { row: within(at.row + 1, rows), column: at.column };
    case "Home":
      return { row: isFar ? 0 : at.row, column: 0 };
    case "End":
      return { row: isFar ? rows - 1 : at.row, column: columns - 1 };
    default:
      return null;
  }
}
