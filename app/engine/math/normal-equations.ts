/**
 * XᵀX, Xᵀy and yᵀy of some rows. They add up over windows, which is what a bootstrap over windows
 * needs: each resample is a sum of a few numbers. Every estimate that is shown comes from QR
 * (`least-squares.ts`); squared matrices serve the resamples only, where the columns' condition is
 * far below 1e4 and seven digits are more than the spread between resamples.
 */
export interface NormalEquations {
  /** n × n, row-major, symmetric. */
  gram: Float64Array;
  /** Xᵀy, n. */
  moment: Float64Array;
  /** yᵀy. */
  square: number;
  rows: number;
}

/** Equations of no rows, for n columns. */
export function emptyNormalEquations(n: number): NormalEquations {
  return { gram: new Float64Array(n * n), moment: new Float64Array(n), square: 0, rows: 0 };
}

/** Equations of the rows [from, to). */
export function normalEquations(
  columns: readonly Float64Array[],
  y: Float64Array,
  from = 0,
  to: number = y.length,
): NormalEquations {
  const n = columns.length;
  const equations = emptyNormalEquations(n);
  for (let p = 0; p < n; p++) {
    const left = columns[p] as Float64Array;
    for (let q = p; q <= n; q++) {
      const right = q === n ? y : (columns[q] as Float64Array);
      let sum = 0;
      for (let i = from; i < to; i++) sum += (left[i] as number) * (right[i] as number);
      if (q === n) {
        equations.moment[p] = sum;
      } else {
        equations.gram[p * n + q] = sum;
        equations.gram[q * n + p] = sum;
      }
    }
  }
  for (let i = from; i < to; i++) equations.square += (y[i] as number) ** 2;
  equations.rows = to - from;
  return equations;
}

/**
 * Solves (XᵀX) b = Xᵀy by Cholesky with the columns scaled to unit 2-norm.
 *
 * @returns one coefficient for each column; null where the columns depend on each other
 */
export function solveNormalEquations(equations: NormalEquations): Float64Array | null {
  return solveGram(equations.gram, equations.moment);
}

/** As {@link solveNormalEquations}, for a Gram matrix and right side on their own. */
export function solveGram(gram: Float64Array, moment: Float64Array): Float64Array | null {
  const n = moment.length;
  const scale = new Float64Array(n);
  for (let i = 0; i < n; i++) {
    const square = gram[i * n + i] as number;
    if (!(square > 0)) return null;
    scale[i] = 1 / Math.sqrt(square);
  }
  const l = new Float64Array(n * n);
  const b = new Float64Array(n);
  for (let i = 0; i < n; i++) {
    for (let j = 0; j <= i; j++) {
      let sum = (gram[i * n + j] as number) * (scale[i] as number) * (scale[j] as number);
      for (let k = 0; k < j; k++) sum -= (l[i * n + k] as number) * (l[j * n + k] as number);
      if (i === j) {
        // What is left of a unit column; below this nothing but rounding is.
        if (!(sum > 1e-14)) return null;
        l[i * n + i] = Math.sqrt(sum);
      } else {
        l[i * n + j] = sum / (l[j * n + j] as number);
      }
    }
    let sum = (moment[i] as number) * (scale[i] as number);
    for (let k = 0; k < i; k++) sum -= (l[i * n + k] as number) * (b[k] as number);
    b[i] = sum / (l[i * n + i] as number);
  }
  for (let i = n - 1; i >= 0; i--) {
    let sum = b[i] as number;
    for (let k = i + 1; k < n; k++) sum -= (l[k * n + i] as number) * (b[k] as number);
    b[i] = sum / (l[i * n + i] as number);
  }
  for (let i = 0; i < n; i++) b[i] = (b[i] as number) * (scale[i] as number);
  return b;
}
