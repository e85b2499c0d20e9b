/** Mean over [from, to); NaN for no samples. */
export function mean(x: ArrayLike<number>, from = 0, to: number = x.length): number {
  let sum = 0;
  for (let i = from; i < to; i++) sum += x[i] as number;
  return sum / (to - from);
}

/** Σ (x − mean)² over [from, to), two-pass. */
export function sumOfSquaresAboutMean(
  x: ArrayLike<number>,
  from = 0,
  to: number = x.length,
): number {
  const centre = mean(x, from, to);
  let squares = 0;
  let rest = 0;
  for (let i = from; i < to; i++) {
    const deviation = (x[i] as number) - centre;
    squares += deviation * deviation;
    rest += deviation;
  }
  // The mean's own rounding, taken back (Chan, Golub & LeVeque 1983, corrected two-pass).
  return squares - (rest * rest) / (to - from);
}

/** Variance about the mean, divided by n. */
export function variance(x: ArrayLike<number>, from = 0, to: number = x.length): number {
  return sumOfSquaresAboutMean(x, from, to) / (to - from);
}

/** Standard deviation with n − 1 below it; NaN for fewer than two values. */
export function sampleSd(x: ArrayLike<number>, from = 0, to: number = x.length): number {
  if (to - from < 2) return Number.NaN;
  return Math.sqrt(sumOfSquaresAboutMean(x, from, to) / (to - from - 1));
}

/** √ of the mean square over [from, to), about 0. */
export function rms(x: ArrayLike<number>, from = 0, to: number = x.length): number {
  return Math.sqrt(sumOfSquares(x, from, to) / (to - from));
}

/** Σ x² over [from, to). */
export function sumOfSquares(x: ArrayLike<number>, from = 0, to: number = x.length): number {
  let sum = 0;
  for (let i = from; i < to; i++) sum += (x[i] as number) * (x[i] as number);
  return sum;
}

/**
 * Lag-1 autocorrelation Σ rᵢ rᵢ₊₁ / Σ rᵢ², mean removed.
 *
 * @returns null where it is not defined: fewer than two values, or all the same
 */
export function lag1Autocorrelation(
  x: ArrayLike<number>,
  from = 0,
  to: number = x.length,
): number | null {
  const centre = mean(x, from, to);
  let products = 0;
  let squares = 0;
  let before = 0;
  for (let i = from; i < to; i++) {
    const deviation = (x[i] as number) - centre;
    if (i > from) products += before * deviation;
    squares += deviation * deviation;
    before = deviation;
  }
  return to - from < 2 || squares === 0 ? null : products / squares;
}
