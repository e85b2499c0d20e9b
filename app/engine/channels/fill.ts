import type { Segment } from "#app/engine/types.ts";

/** Cells without a value. */
export function countMissing(values: Float64Array): number {
  let count = 0;
  for (const value of values) if (Number.isNaN(value)) count++;
  return count;
}

/**
 * Fills runs of at most `longest` missing samples by a straight line between their neighbours. A run
 * at an end of a stretch has only one neighbour and stays missing: nothing is drawn across a gap.
 *
 * @param stretches  where to fill; the whole column if left out
 * @returns the filled column with 1 where a sample was filled, or the column itself and null
 */
export function fillMissing(
  values: Float64Array,
  longest: number,
  stretches: Segment[] = [{ start: 0, end: values.length }],
): { values: Float64Array; filled: Uint8Array | null } {
  let out: Float64Array | null = null;
  let filled: Uint8Array | null = null;
  if (longest < 1) return { values, filled };
  for (const { start, end } of stretches) {
    for (let i = start; i < end; i++) {
      if (!Number.isNaN(values[i] as number)) continue;
      let after = i;
      while (after < end && Number.isNaN(values[after] as number)) after++;
      if (i > start && after < end && after - i <= longest) {
        out ??= values.slice();
        filled ??= new Uint8Array(values.length);
        const left = values[i - 1] as number;
        const rise = ((values[after] as number) - left) / (after - i + 1);
        for (let k = i; k < after; k++) {
          out[k] = left + rise * (k - i + 1);
          filled[k] = 1;
        }
      }
      i = after;
    }
  }
  return { values: out ?? values, filled };
}
