/**
 * Causal moving root mean square: sample i looks at the `spanSamples` samples that end with it, so
 * nothing is seen before it happens.
 *
 * @returns a new array as long as `x`; NaN before the first whole span
 * @throws RangeError where the span is not a whole number ≥ 1
 */
export function movingRms(x: Float64Array, spanSamples: number): Float64Array {
  if (!Number.isInteger(spanSamples) || spanSamples < 1) {
    throw new RangeError(`a span of ${spanSamples} samples`);
  }
  const y = new Float64Array(x.length).fill(Number.NaN);
  for (let i = spanSamples - 1; i < x.length; i++) {
    // Summed afresh: a running sum would carry the rounding of a large burst into the quiet after it.
    let sum = 0;
    for (let j = i - spanSamples + 1; j <= i; j++) sum += (x[j] as number) * (x[j] as number);
    y[i] = Math.sqrt(sum / spanSamples);
  }
  return y;
}
