import { mean } from "#app/engine/math/moments.ts";
import type { Impedance, PreparedAxis, WindowColumns, WindowSpan } from "#app/engine/types.ts";

/** Means over a window's baseline, in the order of the columns. */
export interface Baseline {
  angleRad: number;
  velocityRadPerS: number;
  accelerationRadPerS2: number;
  /** With the rig's own part still in it: the background torque. */
  torqueNm: number;
}

/**
 * Baseline means of θ, ω, α and T.
 *
 * @returns null where a sample of the baseline has no value
 */
export function baselineOf(prepared: PreparedAxis, span: WindowSpan): Baseline | null {
  const { baselineStart: from, baselineEnd: to } = span;
  if (from < 0 || to > prepared.angleRad.length || to <= from) return null;
  const baseline = {
    angleRad: mean(prepared.angleRad, from, to),
    velocityRadPerS: mean(prepared.velocityRadPerS, from, to),
    accelerationRadPerS2: mean(prepared.accelerationRadPerS2, from, to),
    torqueNm: mean(prepared.torqueNm, from, to),
  };
  return Object.values(baseline).some(Number.isNaN) ? null : baseline;
}

/**
 * Columns over the closed range of samples, relative to the baseline; then the rig's own torque is
 * taken out: T − (K_r θ + B_r ω + I_r α). All four columns lose their baseline mean: the filter
 * smears a ramp into its baseline, and taking it off angle and torque only biases K, B and I by up
 * to 6 %.
 */
export function cutColumns(
  prepared: PreparedAxis,
  baseline: Baseline,
  from: number,
  to: number,
  rig: Impedance,
): WindowColumns {
  const n = Math.max(0, to - from + 1);
  const angleRad = new Float64Array(n);
  const velocityRadPerS = new Float64Array(n);
  const accelerationRadPerS2 = new Float64Array(n);
  const torqueNm = new Float64Array(n);
  for (let i = 0; i < n; i++) {
    const theta = (prepared.angleRad[from + i] as number) - baseline.angleRad;
    const omega = (prepared.velocityRadPerS[from + i] as number) - baseline.velocityRadPerS;
    const alpha =
      (prepared.accelerationRadPerS2[from + i] as number) - baseline.accelerationRadPerS2;
    angleRad[i] = theta;
    velocityRadPerS[i] = omega;
    accelerationRadPerS2[i] = alpha;
    torqueNm[i] =
      (prepared.torqueNm[from + i] as number) -
      baseline.torqueNm -
      (rig.K * theta + rig.B * omega + rig.I * alpha);
  }
  return { angleRad, velocityRadPerS, accelerationRadPerS2, torqueNm };
}

/** Last sample up to `to` that is reached from `from` without one that has no value. */
export function lastWithValue(prepared: PreparedAxis, from: number, to: number): number {
  let i = from;
  while (
    i < to &&
    i + 1 < prepared.torqueNm.length &&
    !Number.isNaN(prepared.accelerationRadPerS2[i + 1]) &&
    !Number.isNaN(prepared.torqueNm[i + 1])
  ) {
    i++;
  }
  return i;
}
