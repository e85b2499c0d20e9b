import { columnOf } from "#app/engine/fit/fit-model.ts";
import { leastSquares } from "#app/engine/math/least-squares.ts";
import { mean } from "#app/engine/math/moments.ts";
import { nonnegativeFromNormalEquations } from "#app/engine/math/nonnegative.ts";
import { normalEquations } from "#app/engine/math/normal-equations.ts";
import type { ImpedanceModel, WindowColumns, WindowSpan } from "#app/engine/types.ts";
import { TERMS } from "#app/engine/types.ts";

/** Delays that are tried, to each side. */
const REACH_MS = 20;

/**
 * Residual sum of squares of one window's own fit with its torque (and the torque's baseline mean)
 * shifted by each whole sample within ± 20 ms; entry k belongs to a shift of k − (length − 1) / 2
 * samples, T(i) ← T(i + shift). Added over windows and interpolated, its minimum is the torque's
 * delay: refitting finds what correlating the torque with the fitted model cannot, since B and I
 * absorb a delay.
 *
 * @param torqueNm  of the whole recording, filtered, rig not removed
 * @param columns  of the window, relative to its baseline, rig removed
 * @returns null where a shifted torque has no value or the columns are dependent
 */
export function lagProfile(
  torqueNm: Float64Array,
  span: WindowSpan,
  columns: WindowColumns,
  model: ImpedanceModel,
  rateHz: number,
): Float64Array | null {
  const reach = Math.floor((REACH_MS * rateHz) / 1000 + 1e-6);
  const from = Math.min(span.start, span.baselineStart) - reach;
  const to = Math.max(span.end, span.baselineEnd - 1) + reach;
  if (from < 0 || to >= torqueNm.length) return null;
  for (let i = from; i <= to; i++) if (Number.isNaN(torqueNm[i])) return null;

  const n = columns.torqueNm.length;
  const known = knownTorque(torqueNm, span, columns, model);
  const residualOf = residualSumOfSquares(
    model.free.map((term) => columnOf(columns, term)),
    model.nonnegative,
  );
  if (residualOf === null) return null;

  const profile = new Float64Array(2 * reach + 1);
  const shifted = new Float64Array(n);
  for (let shift = -reach; shift <= reach; shift++) {
    const level = mean(torqueNm, span.baselineStart + shift, span.baselineEnd + shift);
    for (let i = 0; i < n; i++) {
      shifted[i] = (torqueNm[span.start + shift + i] as number) - level - (known[i] as number);
    }
    const sum = residualOf(shifted);
    if (sum === null) return null;
    profile[shift + reach] = sum;
  }
  return profile;
}

/** What the free terms need not explain: the rig's torque, as the columns left it out, and fixed terms'. */
function knownTorque(
  torqueNm: Float64Array,
  span: WindowSpan,
  columns: WindowColumns,
  model: ImpedanceModel,
): Float64Array {
  const level = mean(torqueNm, span.baselineStart, span.baselineEnd);
  return columns.torqueNm.map((relative, i) => {
    let known = (torqueNm[span.start + i] as number) - level - relative;
    for (const term of TERMS) {
      known += (model.fixed[term] ?? 0) * (columnOf(columns, term)[i] as number);
    }
    return known;
  });
}

/** min ‖y − Xb‖² as a function of y alone: what depends on X is done once. */
function residualSumOfSquares(
  regressors: Float64Array[],
  nonnegative: boolean,
): ((y: Float64Array) => number | null) | null {
  if (nonnegative) {
    return (y) => {
      const equations = normalEquations(regressors, y);
      const b = nonnegativeFromNormalEquations(equations);
      if (b === null) return null;
      const { gram, moment, square } = equations;
      let sum = square;
      b.forEach((left, p) => {
        sum -= 2 * left * (moment[p] as number);
        b.forEach((right, q) => {
          sum += left * right * (gram[p * b.length + q] as number);
        });
      });
      return sum;
    };
  }
  const basis = orthonormal(regressors);
  if (basis === null) return null;
  // ‖y‖² less what lies along the columns: its rounding, 1e-16 ‖y‖², is far below a sample's delay.
  return (y) => basis.reduce((rest, direction) => rest - dot(direction, y) ** 2, dot(y, y));
}

/** Orthonormal columns with the same span, by Gram and Schmidt twice; null where they are dependent. */
function orthonormal(columns: Float64Array[]): Float64Array[] | null {
  const first = columns[0];
  if (first === undefined || leastSquares(columns, first).status === "singular") return null;
  const basis: Float64Array[] = [];
  for (const column of columns) {
    const direction = Float64Array.from(column);
    for (const before of [...basis, ...basis]) takeOut(before, direction);
    const norm = Math.sqrt(dot(direction, direction));
    for (let i = 0; i < direction.length; i++) direction[i] = (direction[i] as number) / norm;
    basis.push(direction);
  }
  return basis;
}

/** Removes from x in place what lies along a unit direction. */
function takeOut(direction: Float64Array, x: Float64Array): void {
  const along = dot(direction, x);
  for (let i = 0; i < x.length; i++) {
    x[i] = (x[i] as number) - along * (direction[i] as number);
  }
}

function dot(a: Float64Array, b: Float64Array): number {
  let sum = 0;
  for (let i = 0; i < a.length; i++) sum += (a[i] as number) * (b[i] as number);
  return sum;
}
