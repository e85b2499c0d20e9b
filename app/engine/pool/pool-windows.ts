import type { NormalEquations } from "#app/engine/math/normal-equations.ts";
import { bootstrapIntervals } from "#app/engine/pool/bootstrap.ts";
import type { WindowSpread } from "#app/engine/pool/interval.ts";
import { windowSpread } from "#app/engine/pool/interval.ts";
import type { FittedModel, ImpedanceModel, PooledTerm, Term } from "#app/engine/types.ts";
import { TERMS } from "#app/engine/types.ts";

const EMPTY: PooledTerm = {
  estimate: null,
  window_mean: null,
  window_sd: null,
  t: null,
  bootstrap: null,
};

/**
 * The pooled terms of one axis and direction.
 *
 * @param stacked  fit of the stacked windows; null where there is none
 * @param windows  fits of the included windows
 * @param equations  their normal equations over the free terms
 */
export function poolTerms(
  stacked: FittedModel | null,
  windows: readonly FittedModel[],
  equations: readonly NormalEquations[],
  model: ImpedanceModel,
  uncertainty: { level: number; resamples: number; seed: number },
): { terms: Record<Term, PooledTerm>; spreads: Record<Term, WindowSpread | null> } {
  const terms = { K: { ...EMPTY }, B: { ...EMPTY }, I: { ...EMPTY } };
  const spreads: Record<Term, WindowSpread | null> = { K: null, B: null, I: null };
  if (stacked === null) return { terms, spreads };
  const bootstrap =
    windows.length < 2 ? null : bootstrapIntervals(equations, model.nonnegative, uncertainty);
  for (const term of TERMS) {
    const pooled = terms[term];
    pooled.estimate = stacked.parameters[term];
    const place = model.free.indexOf(term);
    if (place < 0) continue;
    const spread = windowSpread(
      windows.map((fit) => fit.parameters[term] as number),
      uncertainty.level,
    );
    spreads[term] = spread;
    pooled.window_mean = spread?.mean ?? null;
    pooled.window_sd = spread?.sd ?? null;
    pooled.t = spread?.t ?? null;
    pooled.bootstrap = bootstrap?.[place] ?? null;
  }
  return { terms, spreads };
}
