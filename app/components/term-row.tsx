import type { ReactNode } from "react";
import {
  halfWidth,
  type Scale,
  scaleOf,
  supportedDecimals,
  TERM_NAMES,
} from "#app/domain/quantity.ts";
import type { Interval, Term } from "#app/engine/types.ts";
import { FigureNumber } from "./figure-number.tsx";

const TERM_COLOURS: Record<Term, string> = { K: "text-K", B: "text-B", I: "text-I" };

/** K, B or I in its colour; the letter is always there, so that colour is never alone. */
export function TermLetter({ term }: { term: Term }) {
  return <span className={`font-semibold ${TERM_COLOURS[term]}`}>{term}</span>;
}

/** "K stiffness" and the unit below it. */
export function TermName({ term, unit }: { term: Term; unit: string }) {
  return (
    <>
      <TermLetter term={term} /> {TERM_NAMES[term]} <span className="unit block">{unit}</span>
    </>
  );
}

/**
 * One row of a table for a term: letter, name, unit, this one's value, value and interval of all.
 * Both numbers share decimals, so that their points stand in one column.
 */
export function TermRow({
  term,
  value,
  pooled,
  scale: givenScale,
  mark,
}: {
  term: Term;
  /** This window's value; leave out where the table has no such column. */
  value?: number | null;
  /** Value and interval over windows; leave out where the table has no such column. */
  pooled?: { value: number | null; interval: Interval | null };
  scale?: Scale;
  /** "unverified", a flag's word … behind the numbers. */
  mark?: ReactNode;
}) {
  const scale = givenScale ?? scaleOf(term, [value ?? null, pooled?.value ?? null]);
  const half = pooled ? halfWidth(pooled.interval) : null;
  const decimals = supportedDecimals(
    scaled(pooled?.value ?? value ?? null, scale),
    scaled(half, scale),
  );
  return (
    <tr>
      <th scope="row">
        <TermName term={term} unit={scale.unit} />
      </th>
      {value !== undefined ? (
        <td className="r">
          <FigureNumber decimals={decimals} factor={scale.factor} value={value} />
        </td>
      ) : null}
      {pooled ? (
        <td className="r">
          <FigureNumber
            decimals={decimals}
            factor={scale.factor}
            interval={pooled.interval}
            showInterval
            value={pooled.value}
          />
          {mark ? <span className="unit block">{mark}</span> : null}
        </td>
      ) : null}
    </tr>
  );
}

function scaled(value: number | null, scale: Scale): number | null {
  return value === null ? null : value * scale.factor;
}
