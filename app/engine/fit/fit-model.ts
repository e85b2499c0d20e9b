import { leastSquares } from "#app/engine/math/least-squares.ts";
import { sumOfSquares } from "#app/engine/math/moments.ts";
import { nonnegativeLeastSquares } from "#app/engine/math/nonnegative.ts";
import type {
  Impedance,
  ImpedanceModel,
  ModelFit,
  Term,
  WindowColumns,
} from "#app/engine/types.ts";
import { TERMS } from "#app/engine/types.ts";

/** A fit needs this many samples for each term that it estimates. */
export const SAMPLES_PER_TERM = 2;

/** The protocol's model with its free terms told from the fixed ones. */
export function impedanceModel(model: {
  terms: readonly Term[];
  fixed: Partial<Impedance>;
  nonnegative: boolean;
}): ImpedanceModel {
  return {
    free: TERMS.filter((term) => model.terms.includes(term) && model.fixed[term] === undefined),
    fixed: model.fixed,
    nonnegative: model.nonnegative,
  };
}

/** The column that a term multiplies: θ, ω or α. */
export function columnOf(columns: WindowColumns, term: Term): Float64Array {
  if (term === "K") return columns.angleRad;
  return term === "B" ? columns.velocityRadPerS : columns.accelerationRadPerS2;
}

/**
 * T = K θ + B ω + I α by least squares without intercept; fixed terms go to the torque's side, and
 * where the model is bounded the free ones are ≥ 0.
 */
export function fitModel(columns: WindowColumns, model: ImpedanceModel): ModelFit {
  const n = columns.torqueNm.length;
  if (n < SAMPLES_PER_TERM * model.free.length) return { status: "too_short" };
  const regressors = model.free.map((term) => columnOf(columns, term));
  const torque = withoutFixed(columns, model);
  // A gain or a given term of 1e200 leaves what no sum of squares can hold.
  if (![...regressors, torque].every((x) => Number.isFinite(sumOfSquares(x)))) {
    return { status: "singular" };
  }
  const bound = boundTerms(regressors, torque, model);
  if (bound === null) return { status: "singular" };

  const passive = model.free.filter((term) => !bound.terms.includes(term));
  const parameters: Record<Term, number | null> = { K: null, B: null, I: null, ...model.fixed };
  for (const term of bound.terms) parameters[term] = 0;
  let covarianceUnscaled = new Float64Array(0);
  if (passive.length > 0) {
    const solution = leastSquares(
      passive.map((term) => columnOf(columns, term)),
      torque,
    );
    if (solution.status === "singular") return solution;
    passive.forEach((term, j) => {
      parameters[term] = solution.coefficients[j] as number;
    });
    covarianceUnscaled = Float64Array.from(solution.covarianceUnscaled);
    if (bound.conditionNumber === null) bound.conditionNumber = solution.conditionNumber;
  }
  const modelledNm = modelledTorque(columns, parameters);
  const residualNm = Float64Array.from(columns.torqueNm);
  for (let i = 0; i < n; i++) residualNm[i] = (residualNm[i] as number) - (modelledNm[i] as number);
  return {
    status: "fitted",
    parameters,
    bound: bound.terms,
    conditionNumber: bound.conditionNumber ?? 1,
    covarianceUnscaled,
    covarianceTerms: passive,
    modelledNm,
    residualNm,
  };
}

/** The torque that terms with these values give; an absent term (null) gives none. */
export function modelledTorque(
  columns: WindowColumns,
  parameters: Record<Term, number | null>,
): Float64Array {
  const modelled = new Float64Array(columns.torqueNm.length);
  for (const term of TERMS) {
    const value = parameters[term];
    if (value === null) continue;
    const column = columnOf(columns, term);
    for (let i = 0; i < modelled.length; i++) {
      modelled[i] = (modelled[i] as number) + value * (column[i] as number);
    }
  }
  return modelled;
}

/** The torque that is left for the free terms. */
export function withoutFixed(columns: WindowColumns, model: ImpedanceModel): Float64Array {
  const torque = Float64Array.from(columns.torqueNm);
  for (const term of TERMS) {
    const value = model.fixed[term];
    if (value === undefined) continue;
    const column = columnOf(columns, term);
    for (let i = 0; i < torque.length; i++) {
      torque[i] = (torque[i] as number) - value * (column[i] as number);
    }
  }
  return torque;
}

/** Which free terms the bound holds at 0, with the condition of all free columns where it is known. */
function boundTerms(
  regressors: Float64Array[],
  torque: Float64Array,
  model: ImpedanceModel,
): { terms: Term[]; conditionNumber: number | null } | null {
  if (!model.nonnegative) return { terms: [], conditionNumber: null };
  const solution = nonnegativeLeastSquares(regressors, torque);
  if (solution.status === "singular") return null;
  return {
    terms: solution.bound.map((j) => model.free[j] as Term),
    conditionNumber: solution.conditionNumber,
  };
}
