import { useState } from "react";
import { SmallResidual } from "#app/charts/small-residual.tsx";
import { Button } from "#app/components/button.tsx";
import { formatDigits } from "#app/domain/quantity.ts";

/** One window's residual, as a small view shows it. */
export interface WindowResidual {
  number: number;
  rmsNm: number;
  timeS: Float64Array;
  residualNm: Float64Array;
  /** "towards extension". */
  words: string;
}

const FIRST_SHOWN = 12;

/** Largest RMS first, all on one scale: what deserves a look stands at the front. */
export function byLargestRms<T extends { rmsNm: number; number: number }>(
  windows: readonly T[],
): T[] {
  return [...windows].sort((a, b) => b.rmsNm - a.rmsNm || a.number - b.number);
}

/** Small views of all windows' residuals; one chooses its window. */
export function ResidualList({
  windows,
  chosen,
  onChoose,
}: {
  windows: readonly WindowResidual[];
  chosen: number | null;
  onChoose: (number: number) => void;
}) {
  const [all, setAll] = useState(false);
  const sorted = byLargestRms(windows);
  const reachNm = reachOf(sorted);
  const shown = all ? sorted : sorted.slice(0, FIRST_SHOWN);
  return (
    <section aria-label="Residuals of all windows">
      <div className="mb-1.5 flex items-baseline gap-2">
        <h2>Residuals, largest RMS first</h2>
        <span className="unit">N·m, one scale</span>
        {sorted.length > FIRST_SHOWN ? (
          <Button className="ml-auto" look="quiet" onClick={() => setAll(!all)} type="button">
            {all ? `Show the first ${FIRST_SHOWN}` : `Show all ${sorted.length}`}
          </Button>
        ) : null}
      </div>
      <ul className="grid grid-cols-[repeat(auto-fill,minmax(112px,1fr))] gap-2">
        {shown.map((window) => (
          <li key={window.number}>
            <button
              aria-pressed={window.number === chosen}
              className="block w-full border border-rule px-1.5 py-1 text-left hover:bg-hover aria-pressed:outline-2 aria-pressed:outline-ink"
              onClick={() => onChoose(window.number)}
              type="button"
            >
              <span className="flex justify-between font-mono text-sm text-ink-2">
                <span>
                  <span className="sr-only">Window </span>
                  {window.number}
                  <span className="sr-only">, {window.words}, RMS </span>
                </span>
                <span>
                  {formatDigits(window.rmsNm, 2)}
                  <span className="sr-only"> N·m</span>
                </span>
              </span>
              <SmallResidual
                reachNm={reachNm}
                residualNm={window.residualNm}
                timeS={window.timeS}
              />
            </button>
          </li>
        ))}
      </ul>
    </section>
  );
}

/** The largest residual of all, with a little room. */
function reachOf(windows: readonly WindowResidual[]): number {
  let reach = 0;
  for (const { residualNm } of windows) {
    for (const value of residualNm) if (Math.abs(value) > reach) reach = Math.abs(value);
  }
  return reach > 0 ? reach * 1.08 : 1;
}
