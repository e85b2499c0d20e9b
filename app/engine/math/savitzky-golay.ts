/**
 * Weights with which a least-squares polynomial over `spanSamples` equally spaced samples gives its
 * value at the middle one (Savitzky & Golay 1964, Anal. Chem. 36:1627). Built on polynomials that
 * are orthogonal over the samples (Gram), so the digits do not depend on the span.
 *
 * @returns `spanSamples` weights, symmetric, their sum 1
 * @throws RangeError where the span is not odd and over the polynomial's degree
 */
export function savitzkyGolayCoefficients(spanSamples: number, polynomial: number): Float64Array {
  if (!Number.isInteger(polynomial) || polynomial < 0) {
    throw new RangeError(`polynomial of degree ${polynomial}`);
  }
  if (!Number.isInteger(spanSamples) || spanSamples % 2 !== 1 || spanSamples <= polynomial) {
    throw new RangeError(
      `a span of ${spanSamples} samples: it must be odd and over the polynomial's ${polynomial}`,
    );
  }
  const half = (spanSamples - 1) / 2;
  const weights = new Float64Array(spanSamples);
  // Three-term recurrence p₊ = x p − c p₋ on x = −half … half; the middle coefficient is 0 by
  // symmetry, and odd polynomials are 0 in the middle.
  let before = new Float64Array(spanSamples);
  let now = new Float64Array(spanSamples).fill(1);
  let squareBefore = 1;
  for (let degree = 0; degree <= polynomial; degree++) {
    const square = sumOfSquares(now);
    const middle = now[half] as number;
    if (degree % 2 === 0) {
      for (let i = 0; i < spanSamples; i++) {
        weights[i] = (weights[i] as number) + ((now[i] as number) * middle) / square;
      }
    }
    const c = degree === 0 ? 0 : square / squareBefore;
    const next = new Float64Array(spanSamples);
    for (let i = 0; i < spanSamples; i++) {
      next[i] = (i - half) * (now[i] as number) - c * (before[i] as number);
    }
    before = now;
    now = next;
    squareBefore = square;
  }
  return weights;
}

/**
 * Savitzky–Golay smoothing.
 *
 * @returns a new array as long as `x`; NaN at the (span − 1) / 2 samples at each end
 * @throws RangeError as {@link savitzkyGolayCoefficients}
 */
export function savitzkyGolaySmooth(
  x: Float64Array,
  spanSamples: number,
  polynomial: number,
): Float64Array {
  const y = new Float64Array(x.length).fill(Number.NaN);
  if (spanSamples > x.length) return y;
  const weights = savitzkyGolayCoefficients(spanSamples, polynomial);
  const half = (spanSamples - 1) / 2;
  for (let i = half; i < x.length - half; i++) {
    let sum = 0;
    for (let j = 0; j < spanSamples; j++) {
      sum += (weights[j] as number) * (x[i - half + j] as number);
    }
    y[i] = sum;
  }
  return y;
}

function sumOfSquares(x: Float64Array): number {
  let sum = 0;
  for (let i = 0; i < x.length; i++) sum += (x[i] as number) ** 2;
  return sum;
}
