import { nonnegativeFromNormalEquations } from "#app/engine/math/nonnegative.ts";
import type { NormalEquations } from "#app/engine/math/normal-equations.ts";
import {
  addNormalEquations,
  clearNormalEquations,
  emptyNormalEquations,
  solveNormalEquations,
} from "#app/engine/math/normal-equations.ts";
import { quantile } from "#app/engine/math/quantile.ts";
import { seededRandom } from "#app/engine/math/random.ts";
import type { Interval } from "#app/engine/types.ts";

/**
 * Percentile intervals of the stacked estimate over windows drawn with replacement (Efron &
 * Tibshirani 1993, chapter 13). A window's normal equations stand for its samples, so a resample is
 * a sum of a few numbers. It covers too little for few windows and is kept for comparison only.
 *
 * @param windows  normal equations of each window over the free terms, two or more
 * @returns one interval for each free term; null where every resample is singular
 */
export function bootstrapIntervals(
  windows: readonly NormalEquations[],
  nonnegative: boolean,
  { level, resamples, seed }: { level: number; resamples: number; seed: number },
): Interval[] | null {
  const terms = windows[0]?.moment.length ?? 0;
  const random = seededRandom(seed);
  const sum = emptyNormalEquations(terms);
  const draws = Array.from({ length: terms }, () => new Float64Array(resamples));
  let kept = 0;
  for (let r = 0; r < resamples; r++) {
    clearNormalEquations(sum);
    for (let w = 0; w < windows.length; w++) {
      addNormalEquations(sum, windows[random.nextInt(windows.length)] as NormalEquations);
    }
    const estimate = nonnegative ? nonnegativeFromNormalEquations(sum) : solveNormalEquations(sum);
    if (estimate === null) continue;
    for (let j = 0; j < terms; j++) (draws[j] as Float64Array)[kept] = estimate[j] as number;
    kept++;
  }
  if (kept === 0) return null;
  const tail = (1 - level) / 2;
  return draws.map((values) => {
    const sorted = values.subarray(0, kept).sort();
    return [quantile(sorted, tail), quantile(sorted, 1 - tail)];
  });
}
