import { correlationOf } from "#app/engine/math/least-squares.ts";
import type { Term } from "#app/engine/types.ts";
import { TERMS } from "#app/engine/types.ts";

/**
 * Correlations of the estimates, 3 × 3 in the order K, B, I; a term that was not estimated has 0
 * beside 1 on the diagonal.
 *
 * @param covarianceUnscaled  (XᵀX)⁻¹ over `terms`, row-major
 */
export function correlationMatrix(
  covarianceUnscaled: Float64Array,
  terms: readonly Term[],
): number[][] {
  const n = terms.length;
  const correlation = correlationOf(covarianceUnscaled, n);
  return TERMS.map((row) =>
    TERMS.map((column) => {
      if (row === column) return 1;
      const [i, j] = [terms.indexOf(row), terms.indexOf(column)];
      return i < 0 || j < 0 ? 0 : (correlation[i * n + j] as number);
    }),
  );
}
