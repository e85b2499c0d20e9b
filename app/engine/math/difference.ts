/** Samples at each end without a derivative. */
const UNVALUED = 2;

/**
 * First derivative by the five-point central difference,
 * (x₋₂ − 8 x₋₁ + 8 x₊₁ − x₊₂) / 12h; error of order h⁴ (Abramowitz & Stegun 1964, 25.3.6 ff.).
 *
 * @param y  where the result goes, as long as `x`; a new array if left out
 * @returns `y`; NaN at the two samples at each end
 */
export function fivePointFirst(
  x: Float64Array,
  stepS: number,
  y: Float64Array = new Float64Array(x.length),
): Float64Array {
  const n = x.length;
  y.fill(Number.NaN, 0, UNVALUED);
  y.fill(Number.NaN, Math.max(0, n - UNVALUED));
  for (let i = UNVALUED; i < n - UNVALUED; i++) {
    const inner = (x[i + 1] as number) - (x[i - 1] as number);
    const outer = (x[i + 2] as number) - (x[i - 2] as number);
    y[i] = (8 * inner - outer) / (12 * stepS);
  }
  return y;
}

/**
 * Second derivative by the five-point central difference,
 * (−x₋₂ + 16 x₋₁ − 30 x₀ + 16 x₊₁ − x₊₂) / 12h²; error of order h⁴.
 *
 * @param y  where the result goes, as long as `x`; a new array if left out
 * @returns `y`; NaN at the two samples at each end
 */
export function fivePointSecond(
  x: Float64Array,
  stepS: number,
  y: Float64Array = new Float64Array(x.length),
): Float64Array {
  const n = x.length;
  y.fill(Number.NaN, 0, UNVALUED);
  y.fill(Number.NaN, Math.max(0, n - UNVALUED));
  for (let i = UNVALUED; i < n - UNVALUED; i++) {
    const middle = x[i] as number;
    // Differences to the middle first: an offset then costs no digits.
    const inner = (x[i - 1] as number) - middle + ((x[i + 1] as number) - middle);
    const outer = (x[i - 2] as number) - middle + ((x[i + 2] as number) - middle);
    y[i] = (16 * inner - outer) / (12 * stepS * stepS);
  }
  return y;
}
