import { useId } from "react";
import { TERMS, type Term } from "#app/engine/types.ts";
import { useWidth } from "./use-width.ts";

const HEIGHT = 12;
const GAP = 2;

/** How the terms part the torque: each with its colour, its pattern and its letter. */
export function ShareBar({ share }: { share: Record<Term, number | null> }) {
  const id = useId();
  const [box, width] = useWidth<HTMLDivElement>(280);
  const there = TERMS.filter((term) => (share[term] ?? 0) > 0);
  const sum = there.reduce((total, term) => total + (share[term] ?? 0), 0);
  if (there.length === 0 || sum <= 0) return null;
  const room = width - GAP * (there.length - 1);
  let x = 0;
  const parts = there.map((term) => {
    const part = { term, x, wide: ((share[term] ?? 0) / sum) * room };
    x += part.wide + GAP;
    return part;
  });
  const labels = labelPlaces(
    parts.map((part) => part.x),
    width,
  );
  return (
    <div ref={box}>
      <svg aria-hidden="true" className="block" height={HEIGHT} width={width}>
        <defs>
          {parts.map(({ term }) => (
            <TermPattern id={`${id}${term}`} key={term} term={term} />
          ))}
        </defs>
        {parts.map(({ term, x: left, wide }) => (
          <rect
            fill={`url(#${id}${term})`}
            height={HEIGHT}
            key={term}
            width={Math.max(1, wide)}
            x={left}
          />
        ))}
      </svg>
      <div className="relative mt-0.5 h-4 text-sm font-semibold">
        {parts.map(({ term }, i) => (
          <span
            className="absolute whitespace-nowrap"
            key={term}
            style={{ left: labels[i], color: `var(--${term})` }}
          >
            {term} {Math.round(100 * (share[term] ?? 0))} %
          </span>
        ))}
      </div>
    </div>
  );
}

const LABEL_PX = 54;

/** Each label below its part, none over another, none over the end. */
export function labelPlaces(lefts: readonly number[], width: number): number[] {
  const places = [...lefts];
  for (let i = 1; i < places.length; i++) {
    places[i] = Math.max(places[i] as number, (places[i - 1] as number) + LABEL_PX);
  }
  for (let i = places.length - 1; i >= 0; i--) {
    const most = i === places.length - 1 ? width : (places[i + 1] as number);
    places[i] = Math.min(places[i] as number, most - LABEL_PX);
  }
  return places;
}

/** K is solid, B is broken, I is dotted: the same as their lines. */
function TermPattern({ id, term }: { id: string; term: Term }) {
  const colour = `var(--${term})`;
  return (
    <pattern height="6" id={id} patternUnits="userSpaceOnUse" width="6">
      <rect fill={colour} height="6" width="6" />
      {term === "B" ? <path d="M-1 7L7 -1" stroke="var(--sheet)" strokeWidth="1" /> : null}
      {term === "I" ? <circle cx="3" cy="3" fill="var(--sheet)" r="1" /> : null}
    </pattern>
  );
}
