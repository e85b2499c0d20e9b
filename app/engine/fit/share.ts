import { columnOf } from "#app/engine/fit/fit-model.ts";
import type { Term, WindowColumns } from "#app/engine/types.ts";
import { TERMS } from "#app/engine/types.ts";

/**
 * Each term's largest |torque| over the columns' samples, over the sum of the three.
 *
 * @returns null for a term that is absent, and for all where none gives a torque
 */
export function sharesOf(
  columns: WindowColumns,
  parameters: Record<Term, number | null>,
): Record<Term, number | null> {
  const shares: Record<Term, number | null> = { K: null, B: null, I: null };
  let sum = 0;
  for (const term of TERMS) {
    const value = parameters[term];
    if (value === null) continue;
    let largest = 0;
    for (const x of columnOf(columns, term)) largest = Math.max(largest, Math.abs(x));
    shares[term] = Math.abs(value) * largest;
    sum += Math.abs(value) * largest;
  }
  for (const term of TERMS) {
    const share = shares[term];
    if (share !== null) shares[term] = sum > 0 ? share / sum : null;
  }
  return shares;
}
