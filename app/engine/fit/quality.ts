import { lag1Autocorrelation, rms, sumOfSquares, variance } from "#app/engine/math/moments.ts";

export interface FitQuality {
  vaf_pct: number | null;
  vaf_uncentred_pct: number | null;
  rms_residual: number | null;
  lag1: number | null;
}

/** How well a model follows a torque; null where the torque does not vary (or is 0 throughout). */
export function qualityOf(torqueNm: Float64Array, residualNm: Float64Array): FitQuality {
  return {
    vaf_pct: share(variance(residualNm), variance(torqueNm)),
    vaf_uncentred_pct: share(sumOfSquares(residualNm), sumOfSquares(torqueNm)),
    rms_residual: residualNm.length === 0 ? null : rms(residualNm),
    lag1: lag1Autocorrelation(residualNm),
  };
}

/** Whether the residual grows late: the RMS of its last quarter is over twice that of the rest. */
export function hasLateResidual(residualNm: Float64Array): boolean {
  const from = residualNm.length - Math.round(residualNm.length / 4);
  if (from === residualNm.length || from === 0) return false;
  return rms(residualNm, from) > 2 * rms(residualNm, 0, from);
}

function share(left: number, all: number): number | null {
  return all > 0 ? 100 * (1 - left / all) : null;
}
