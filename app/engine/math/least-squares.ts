/** What a least-squares solution returns where the columns are independent. */
export interface LeastSquaresSolution {
  status: "solved";
  /** One for each column, in the column's own units. */
  coefficients: Float64Array;
  /** Ratio of the largest to the smallest singular value of the columns scaled to unit 2-norm. */
  conditionNumber: number;
  /** ‖y − Xb‖², from the part of Qᵀy outside the columns' span. */
  residualSumOfSquares: number;
  /** R of X = QR with each column divided by its norm; n × n, row-major, upper triangle. */
  scaledR: Float64Array;
  /** 2-norms of the columns: R = scaledR · diag(norms). */
  norms: Float64Array;
  /** First n of Qᵀy. */
  qty: Float64Array;
  /** (XᵀX)⁻¹; n × n, row-major, symmetric. Multiply by the residual variance for a covariance. */
  covarianceUnscaled: Float64Array;
}

export type LeastSquares = LeastSquaresSolution | { status: "singular" };

/**
 * Least squares min ‖y − Xb‖ by Householder QR (Golub & Van Loan 2013, algorithm 5.2.1), with every
 * column of unit 2-norm. The design matrix is never squared: at a condition of 1e9 seven digits
 * are left, where normal equations have none. No intercept is added.
 *
 * "singular" means fewer samples than columns, a column of zeros, or columns that depend on each
 * other to the last digit (condition over 1 / (rows · ε)).
 *
 * @param columns  X by columns, all as long as y
 * @param from, to  rows used, half-open
 * @throws RangeError where the range leaves the arrays or a value in it is not finite
 */
export function leastSquares(
  columns: readonly Float64Array[],
  y: Float64Array,
  from = 0,
  to: number = y.length,
): LeastSquares {
  const n = columns.length;
  const rows = to - from;
  checkRange(columns, y, from, to);
  if (n === 0 || rows < n) return { status: "singular" };

  const work = new Float64Array((n + 1) * rows);
  const norms = new Float64Array(n);
  for (let j = 0; j < n; j++) {
    const column = columns[j] as Float64Array;
    let square = 0;
    for (let i = 0; i < rows; i++) {
      const value = column[from + i] as number;
      work[j * rows + i] = value;
      square += value * value;
    }
    if (!Number.isFinite(square))
      throw new RangeError(`column ${j} holds what is no finite number`);
    if (square === 0) return { status: "singular" };
    norms[j] = Math.sqrt(square);
  }
  for (let i = 0; i < rows; i++) {
    const value = y[from + i] as number;
    if (!Number.isFinite(value)) throw new RangeError("y holds what is no finite number");
    work[n * rows + i] = value;
  }
  const diagonal = reflect(work, rows, n);

  // Scaling a column scales its part of R and changes no reflection, so it is done on R: one
  // rounding each in place of one for every sample.
  const scaledR = new Float64Array(n * n);
  const qty = new Float64Array(n);
  for (let i = 0; i < n; i++) {
    scaledR[i * n + i] = (diagonal[i] as number) / (norms[i] as number);
    for (let j = i + 1; j < n; j++) {
      scaledR[i * n + j] = (work[j * rows + i] as number) / (norms[j] as number);
    }
    qty[i] = work[n * rows + i] as number;
  }
  let residualSumOfSquares = 0;
  for (let i = n; i < rows; i++) residualSumOfSquares += (work[n * rows + i] as number) ** 2;

  const conditionNumber = conditionOfTriangle(scaledR, n);
  if (!(conditionNumber < 1 / (rows * Number.EPSILON))) return { status: "singular" };

  const coefficients = solveTriangle(scaledR, qty, n);
  for (let j = 0; j < n; j++) coefficients[j] = (coefficients[j] as number) / (norms[j] as number);
  return {
    status: "solved",
    coefficients,
    conditionNumber,
    residualSumOfSquares,
    scaledR,
    norms,
    qty,
    covarianceUnscaled: inverseOfGram(scaledR, norms, n),
  };
}

/** Correlations of the estimates from (XᵀX)⁻¹; n × n, row-major, 1 on the diagonal. */
export function correlationOf(covarianceUnscaled: Float64Array, n: number): Float64Array {
  const correlation = new Float64Array(n * n);
  for (let i = 0; i < n; i++) {
    for (let j = 0; j < n; j++) {
      const scale = Math.sqrt(
        (covarianceUnscaled[i * n + i] as number) * (covarianceUnscaled[j * n + j] as number),
      );
      correlation[i * n + j] = i === j ? 1 : (covarianceUnscaled[i * n + j] as number) / scale;
    }
  }
  return correlation;
}

/** X b over the rows [from, to); a new array of to − from. */
export function predict(
  columns: readonly Float64Array[],
  coefficients: ArrayLike<number>,
  from: number,
  to: number,
): Float64Array {
  const fitted = new Float64Array(to - from);
  for (let j = 0; j < columns.length; j++) {
    const column = columns[j] as Float64Array;
    const b = coefficients[j] as number;
    for (let i = from; i < to; i++) {
      fitted[i - from] = (fitted[i - from] as number) + b * (column[i] as number);
    }
  }
  return fitted;
}

/**
 * Householder reflections over the n columns of `work` (column-major, n + 1 columns of `rows`, the
 * last one y), in place. R's upper part is left above the diagonal; its diagonal is returned.
 */
function reflect(work: Float64Array, rows: number, n: number): Float64Array {
  const diagonal = new Float64Array(n);
  for (let k = 0; k < n; k++) {
    const top = k * rows + k;
    const end = (k + 1) * rows;
    let square = 0;
    for (let i = top; i < end; i++) square += (work[i] as number) * (work[i] as number);
    if (square === 0) continue; // the diagonal stays 0: seen as singular by the caller
    const lead = work[top] as number;
    const beta = lead > 0 ? -Math.sqrt(square) : Math.sqrt(square);
    diagonal[k] = beta;
    // v = x − β e₁ without cancellation; H = I − v vᵀ / (−β v₁).
    work[top] = lead - beta;
    const divisor = -beta * (work[top] as number);
    for (let j = k + 1; j <= n; j++) {
      const shift = (j - k) * rows;
      let dot = 0;
      for (let i = top; i < end; i++) dot += (work[i] as number) * (work[i + shift] as number);
      const factor = dot / divisor;
      for (let i = top; i < end; i++) {
        work[i + shift] = (work[i + shift] as number) - factor * (work[i] as number);
      }
    }
  }
  return diagonal;
}

/** Back substitution R b = z; NaN or ∞ where R has a 0 on its diagonal. */
function solveTriangle(r: Float64Array, z: Float64Array, n: number): Float64Array {
  const b = new Float64Array(n);
  for (let i = n - 1; i >= 0; i--) {
    let sum = z[i] as number;
    for (let j = i + 1; j < n; j++) sum -= (r[i * n + j] as number) * (b[j] as number);
    b[i] = sum / (r[i * n + i] as number);
  }
  return b;
}

/** (XᵀX)⁻¹ = D⁻¹ (R⁻¹ R⁻ᵀ) D⁻¹ with D = diag(norms). */
function inverseOfGram(r: Float64Array, norms: Float64Array, n: number): Float64Array {
  const inverse = new Float64Array(n * n);
  const unit = new Float64Array(n);
  for (let k = 0; k < n; k++) {
    unit.fill(0);
    unit[k] = 1;
    const column = solveTriangle(r, unit, n);
    for (let i = 0; i < n; i++) inverse[i * n + k] = column[i] as number;
  }
  const covariance = new Float64Array(n * n);
  for (let i = 0; i < n; i++) {
    for (let j = i; j < n; j++) {
      let sum = 0;
      for (let k = j; k < n; k++) {
        sum += (inverse[i * n + k] as number) * (inverse[j * n + k] as number);
      }
      const value = sum / (norms[i] as number) / (norms[j] as number);
      covariance[i * n + j] = value;
      covariance[j * n + i] = value;
    }
  }
  return covariance;
}

/**
 * Ratio of the largest to the smallest singular value of an n × n triangle by one-sided Jacobi
 * rotations of its columns, which keep small singular values to full relative accuracy
 * (Demmel & Veselić 1992). ∞ where one is 0.
 */
function conditionOfTriangle(r: Float64Array, n: number): number {
  const a = new Float64Array(n * n);
  for (let i = 0; i < n; i++) {
    for (let j = 0; j < n; j++) a[j * n + i] = r[i * n + j] as number;
  }
  for (let sweep = 0; sweep < 60; sweep++) {
    let rotated = false;
    for (let p = 0; p < n - 1; p++) {
      for (let q = p + 1; q < n; q++) {
        let pp = 0;
        let qq = 0;
        let pq = 0;
        for (let i = 0; i < n; i++) {
          const x = a[p * n + i] as number;
          const y = a[q * n + i] as number;
          pp += x * x;
          qq += y * y;
          pq += x * y;
        }
        if (Math.abs(pq) <= Number.EPSILON * Math.sqrt(pp * qq)) continue;
        rotated = true;
        const zeta = (qq - pp) / (2 * pq);
        const t = (zeta >= 0 ? 1 : -1) / (Math.abs(zeta) + Math.sqrt(1 + zeta * zeta));
        const c = 1 / Math.sqrt(1 + t * t);
        const s = c * t;
        for (let i = 0; i < n; i++) {
          const x = a[p * n + i] as number;
          const y = a[q * n + i] as number;
          a[p * n + i] = c * x - s * y;
          a[q * n + i] = s * x + c * y;
        }
      }
    }
    if (!rotated) break;
  }
  let largest = 0;
  let smallest = Number.POSITIVE_INFINITY;
  for (let j = 0; j < n; j++) {
    let square = 0;
    for (let i = 0; i < n; i++) square += (a[j * n + i] as number) ** 2;
    largest = Math.max(largest, square);
    smallest = Math.min(smallest, square);
  }
  return smallest === 0 ? Number.POSITIVE_INFINITY : Math.sqrt(largest / smallest);
}

function checkRange(
  columns: readonly Float64Array[],
  y: Float64Array,
  from: number,
  to: number,
): void {
  if (!(Number.isInteger(from) && Number.isInteger(to) && from >= 0 && to <= y.length)) {
    throw new RangeError(`rows ${from} to ${to} of ${y.length}`);
  }
  for (const column of columns) {
    if (column.length !== y.length) {
      throw new RangeError(`a column of ${column.length} rows beside ${y.length} of y`);
    }
  }
}
