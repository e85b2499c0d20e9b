import { nonnegativeFromNormalEquations } from "#app/engine/math/nonnegative.ts";
import type { NormalEquations } from "#app/engine/math/normal-equations.ts";
import { emptyNormalEquations, solveNormalEquations } from "#app/engine/math/normal-equations.ts";
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
  const packed = packedEquations(windows);
  const size = packed.length / windows.length;
  const total = new Float64Array(size);
  const draws = Array.from({ length: terms }, () => new Float64Array(resamples));
  let kept = 0;
  for (let r = 0; r < resamples; r++) {
    total.fill(0);
    for (let w = 0; w < windows.length; w++) {
      const from = random.nextInt(windows.length) * size;
      for (let k = 0; k < size; k++) {
        total[k] = (total[k] as number) + (packed[from + k] as number);
      }
    }
    unpack(total, sum);
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

/**
 * Each window's upper triangle, moments and square behind each other: over an hour of windows a
 * resample then runs through one array.
 */
function packedEquations(windows: readonly NormalEquations[]): Float64Array {
  const terms = windows[0]?.moment.length ?? 0;
  const size = (terms * (terms + 1)) / 2 + terms + 1;
  const packed = new Float64Array(windows.length * size);
  let at = 0;
  for (const { gram, moment, square } of windows) {
    for (let p = 0; p < terms; p++) {
      for (let q = p; q < terms; q++) packed[at++] = gram[p * terms + q] as number;
    }
    for (const value of moment) packed[at++] = value;
    packed[at++] = square;
  }
  return packed;
}

function unpack(total: Float64Array, into: NormalEquations): void {
  const terms = into.moment.length;
  let at = 0;
  for (let p = 0; p < terms; p++) {
    for (let q = p; q < terms; q++) {
      const value = total[at++] as number;
      into.gram[p * terms + q] = value;
      into.gram[q * terms + p] = value;
    }
  }
  for (let p = 0; p < terms; p++) into.moment[p] = total[at++] as number;
  into.square = total[at] as number;
}
