/**
 * Quantile by linear interpolation between the order statistics, type 7 of Hyndman & Fan (1996,
 * Am. Stat. 50:361), the default of R.
 *
 * @param sorted  ascending, at least one value
 * @param probability  0 … 1
 * @throws RangeError for no values or another probability
 */
export function quantile(sorted: ArrayLike<number>, probability: number): number {
  const n = sorted.length;
  if (n === 0) throw new RangeError("a quantile of no values");
  if (!(probability >= 0 && probability <= 1)) throw new RangeError(`probability ${probability}`);
  const position = (n - 1) * probability;
  const below = Math.floor(position);
  const low = sorted[below] as number;
  const high = sorted[Math.min(below + 1, n - 1)] as number;
  return low + (position - below) * (high - low);
}

/** Median of values in any order. @throws RangeError for no values */
export function median(values: ArrayLike<number>): number {
  return quantile(Float64Array.from(values).sort(), 0.5);
}
