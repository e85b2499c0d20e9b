import type { ReactNode } from "react";
import { FigureNumber } from "#app/components/figure-number.tsx";
import { TermLetter } from "#app/components/term-row.tsx";
import { countOf, scaleOf } from "#app/domain/quantity.ts";
import { type ResultPooled, TERMS, type Term, type WindowChoice } from "#app/engine/types.ts";

export interface OneState {
  title: string;
  words: string;
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
  const groups = [...theirs.pooled, ...mine.pooled]
    .map(({ axis, direction }) => ({ axis, direction }))
    .filter((group, i, all) => all.findIndex((other) => isSameGroup(other, group)) === i);
  return (
    <section
      aria-label="Two states of this fit"
      className="my-3 border border-edge bg-sheet p-3"
      role="alert"
    >
      <div className="wide">
        <table className="rows">
          <thead>
            <tr>
              <th scope="col">
                <span className="sr-only">term</span>
              </th>
              <StateHead state={theirs} />
              <StateHead state={mine} />
            </tr>
          </thead>
          <tbody>
            {groups.map((group) =>
              TERMS.map((term) => (
                <TermOfBoth
                  group={group}
                  key={`${group.axis} ${group.direction} ${term}`}
                  mine={mine.pooled.find((each) => isSameGroup(each, group))}
                  term={term}
                  theirs={theirs.pooled.find((each) => isSameGroup(each, group))}
                />
              )),
            )}
          </tbody>
        </table>
      </div>
      <div className="mt-3 flex flex-wrap gap-2">{actions}</div>
    </section>
  );
}

function StateHead({ state }: { state: OneState }) {
  const included = state.windows.filter((window) => window.included).length;
  return (
    <th className="r" scope="col">
      <span className="block text-base font-semibold text-ink">{state.title}</span>
      <span className="block">{state.words}</span>
      <span className="block">
        {countOf(included, "window")} included, {state.windows.length - included} set aside
      </span>
    </th>
  );
}

/** One term in both states; what differs stands out by its weight. */
function TermOfBoth({
  term,
  group,
  theirs,
  mine,
}: {
  term: Term;
  group: { axis: string; direction: string };
  theirs: ResultPooled | undefined;
  mine: ResultPooled | undefined;
}) {
  const [one, other] = [theirs?.[term] ?? null, mine?.[term] ?? null];
  const { factor, unit } = scaleOf(term, [one?.window_mean ?? null, other?.window_mean ?? null]);
  const differs = one?.window_mean !== other?.window_mean;
  return (
    <tr>
      <th scope="row">
        <TermLetter term={term} /> <span className="unit">{unit}</span>
        <span className="text-sm text-ink-2">
          {" "}
          {group.axis}, {group.direction}
        </span>
      </th>
      {[one, other].map((value, i) => (
        <td className="r" key={i === 0 ? "theirs" : "mine"}>
          <FigureNumber
            className={differs ? "font-semibold" : ""}
            factor={factor}
            interval={value?.t ?? null}
            showInterval
            value={value?.window_mean ?? null}
          />
        </td>
      ))}
    </tr>
  );
}

function isSameGroup(
  one: { axis: string; direction: string },
  other: { axis: string; direction: string },
): boolean {
  return one.axis === other.axis && one.direction === other.direction;
}
