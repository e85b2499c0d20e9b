import { leastSquares } from "#app/engine/math/least-squares.ts";
import type { NormalEquations } from "#app/engine/math/normal-equations.ts";
import { solveGram } from "#app/engine/math/normal-equations.ts";

/** A fit whose coefficients are all ≥ 0. */
export interface NonnegativeSolution {
  status: "solved";
  /** Those on the bound are exactly 0. */
  coefficients: Float64Array;
  /** Columns on the bound, ascending: 0 although the free solution would go below. */
  bound: number[];
  /** Condition of all columns, scaled to unit 2-norm, on the bound or not. */
  conditionNumber: number;
}

export type NonnegativeLeastSquares = NonnegativeSolution | { status: "singular" };

/**
 * Least squares with every coefficient ≥ 0, by the active sets of Lawson & Hanson (1974, chapter
 * 23). The rows are reduced once by Householder QR; the sets are then solved, again by QR, on the
 * n × n triangle, which has the same minimum.
 *
 * @param columns  X by columns, all as long as y; rows [from, to)
 * @returns "singular" where the columns depend on each other, bounds or not
 * @throws RangeError as {@link leastSquares}
 */
export function nonnegativeLeastSquares(
  columns: readonly Float64Array[],
  y: Float64Array,
  from = 0,
  to: number = y.length,
): NonnegativeLeastSquares {
  const free = leastSquares(columns, y, from, to);
  if (free.status === "singular") return free;
  const n = columns.length;
  const { scaledR, norms, qty, conditionNumber } = free;
  if (free.coefficients.every((b) => b > 0)) {
    return { status: "solved", coefficients: free.coefficients, bound: [], conditionNumber };
  }
  const unitColumns: Float64Array[] = [];
  for (let j = 0; j < n; j++) {
    const column = new Float64Array(n);
    for (let i = 0; i <= j; i++) column[i] = scaledR[i * n + j] as number;
    unitColumns.push(column);
  }
  const residual = new Float64Array(n);
  const active = activeSet(
    n,
    Math.hypot(...qty),
    (passive) => {
      const solution = leastSquares(
        passive.map((j) => unitColumns[j] as Float64Array),
        qty,
      );
      return solution.status === "solved" ? solution.coefficients : null;
    },
    (j, b) => {
      residual.set(qty);
      for (let k = 0; k < n; k++) {
        const column = unitColumns[k] as Float64Array;
        for (let i = 0; i < n; i++) {
          residual[i] = (residual[i] as number) - (b[k] as number) * (column[i] as number);
        }
      }
      return dot(unitColumns[j] as Float64Array, residual);
    },
  );
  if (active === null) return { status: "singular" };
  const { coefficients, bound } = active;
  for (let j = 0; j < n; j++) coefficients[j] = (coefficients[j] as number) / (norms[j] as number);
  return { status: "solved", coefficients, bound, conditionNumber };
}

/**
 * The same from normal equations, for the resamples of a bootstrap.
 *
 * @returns the coefficients, exactly 0 on the bound; null where the columns depend on each other
 */
export function nonnegativeFromNormalEquations(equations: NormalEquations): Float64Array | null {
  const { gram, moment } = equations;
  const n = moment.length;
  const free = solveGram(gram, moment);
  if (free === null || free.every((b) => b > 0)) return free;
  const norms = new Float64Array(n);
  for (let j = 0; j < n; j++) norms[j] = Math.sqrt(gram[j * n + j] as number);
  const active = activeSet(
    n,
    Math.sqrt(equations.square),
    (passive) => {
      const size = passive.length;
      const part = new Float64Array(size * size);
      const right = new Float64Array(size);
      for (let p = 0; p < size; p++) {
        const row = passive[p] as number;
        right[p] = (moment[row] as number) / (norms[row] as number);
        for (let q = 0; q < size; q++) {
          const column = passive[q] as number;
          part[p * size + q] =
            (gram[row * n + column] as number) /
            ((norms[row] as number) * (norms[column] as number));
        }
      }
      return solveGram(part, right);
    },
    (j, b) => {
      let sum = moment[j] as number;
      for (let k = 0; k < n; k++) {
        sum -= ((gram[j * n + k] as number) * (b[k] as number)) / (norms[k] as number);
      }
      return sum / (norms[j] as number);
    },
  );
  if (active === null) return null;
  const { coefficients } = active;
  for (let j = 0; j < n; j++) coefficients[j] = (coefficients[j] as number) / (norms[j] as number);
  return coefficients;
}

/**
 * Lawson & Hanson's algorithm NNLS on columns of unit norm.
 *
 * @param size  ‖y‖: a gradient below 1e-13 of it is 0
 * @param solve  free least squares over the given columns; null where they are dependent
 * @param gradient  column j's product with the residual at b
 */
function activeSet(
  n: number,
  size: number,
  solve: (passive: number[]) => Float64Array | null,
  gradient: (j: number, b: Float64Array) => number,
): { coefficients: Float64Array; bound: number[] } | null {
  const b = new Float64Array(n);
  const free: boolean[] = new Array<boolean>(n).fill(false);
  const passiveOf = () => [...free.keys()].filter((j) => free[j]);
  // Each round lowers the residual strictly, so a set never comes back; the limit only guards
  // against rounding.
  for (let round = 0; round < 10 * n + 10; round++) {
    let entering = -1;
    let steepest = 1e-13 * size;
    for (let j = 0; j < n; j++) {
      if (free[j]) continue;
      const slope = gradient(j, b);
      if (slope > steepest) {
        steepest = slope;
        entering = j;
      }
    }
    if (entering < 0) break;
    free[entering] = true;
    for (let passive = passiveOf(); passive.length > 0; passive = passiveOf()) {
      const trial = solve(passive);
      if (trial === null) return null;
      let step = 1;
      let leaving = -1;
      for (let p = 0; p < passive.length; p++) {
        const j = passive[p] as number;
        const value = trial[p] as number;
        if (value > 0) continue;
        const fraction = (b[j] as number) / ((b[j] as number) - value);
        if (leaving < 0 || fraction < step) {
          step = fraction;
          leaving = j;
        }
      }
      for (let p = 0; p < passive.length; p++) {
        const j = passive[p] as number;
        b[j] =
          leaving < 0
            ? (trial[p] as number)
            : (b[j] as number) + step * ((trial[p] as number) - (b[j] as number));
      }
      if (leaving < 0) break;
      for (const j of passive) {
        if (j === leaving || (b[j] as number) <= 0) {
          b[j] = 0;
          free[j] = false;
        }
      }
    }
  }
  return { coefficients: b, bound: [...free.keys()].filter((j) => !free[j]) };
}

function dot(a: Float64Array, b: Float64Array): number {
  let sum = 0;
  for (let i = 0; i < a.length; i++) sum += (a[i] as number) * (b[i] as number);
  return sum;
}
