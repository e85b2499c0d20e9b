import type { ReactNode } from "react";
import { FigureNumber } from "#app/components/figure-number.tsx";
import { TermLetter } from "#app/components/term-row.tsx";
import { countOf, scaleOf } from "#app/domain/quantity.ts";
import { type ResultPooled, TERMS, type WindowChoice } from "#app/engine/types.ts";

export interface OneState {
  title: string;
  words: ReactNode;
  windows: readonly WindowChoice[];
  pooled: readonly ResultPooled[];
}

/** Two states of the same fit side by side, for who has to choose; neither is lost. */
export function TwoStates({
  theirs,
  mine,
  actions,
}: {
  theirs: OneState;
  mine: OneState;
  actions: ReactNode;
}) {
  return (
    <section
      aria-label="Two states of this fit"
      className="my-3 border border-edge bg-sheet p-3"
      role="alert"
    >
      <div className="grid gap-4 md:grid-cols-2">
        <State state={theirs} />
        <State state={mine} />
      </div>
      <div className="mt-3 flex flex-wrap gap-2">{actions}</div>
    </section>
  );
}

function State({ state }: { state: OneState }) {
  const included = state.windows.filter((window) => window.included).length;
  const scales = new Map(
    TERMS.map((term) => [
      term,
      scaleOf(
        term,
        state.pooled.map((pooled) => pooled[term].window_mean),
      ),
    ]),
  );
  return (
    <div className="wide">
      <h2>{state.title}</h2>
      <p className="text-sm text-ink-2">{state.words}</p>
      <p className="my-1">
        {countOf(included, "window")} included, {state.windows.length - included} set aside
      </p>
      <table className="rows">
        <thead>
          <tr>
            <th scope="col">towards</th>
            {TERMS.map((term) => (
              <th className="r" key={term} scope="col">
                <TermLetter term={term} /> <span className="unit">{scales.get(term)?.unit}</span>
              </th>
            ))}
          </tr>
        </thead>
        <tbody>
          {state.pooled.map((pooled) => (
            <tr key={`${pooled.axis} ${pooled.direction}`}>
              <th scope="row">
                {pooled.axis} {pooled.direction}
              </th>
              {TERMS.map((term) => (
                <td className="r" key={term}>
                  <FigureNumber
                    factor={scales.get(term)?.factor ?? 1}
                    interval={pooled[term].t}
                    showInterval
                    value={pooled[term].window_mean}
                  />
                </td>
              ))}
            </tr>
          ))}
        </tbody>
      </table>
    </div>
  );
}
