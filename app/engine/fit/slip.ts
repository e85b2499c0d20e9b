import { mean } from "#app/engine/math/moments.ts";
import type { WindowSpan } from "#app/engine/types.ts";

/** Slip over this share of the movement is flagged. */
export const SLIP_LIMIT_PCT = 10;

/**
 * Largest |rig − limb angle| over the window, relative to the baseline, in percent of the largest
 * relative |θ| there.
 *
 * @param slipRad  rig minus limb angle, filtered as the angle; null without a limb angle
 * @param angleRad  θ over the window, relative to the baseline
 * @returns null where there is no limb angle, a sample has no value, or θ is 0 throughout
 */
export function slipPct(
  slipRad: Float64Array | null,
  span: WindowSpan,
  angleRad: Float64Array,
): number | null {
  if (slipRad === null) return null;
  const level = mean(slipRad, span.baselineStart, span.baselineEnd);
  let slip = 0;
  for (let i = span.start; i <= span.end; i++) {
    slip = Math.max(slip, Math.abs((slipRad[i] as number) - level));
  }
  let movement = 0;
  for (const theta of angleRad) movement = Math.max(movement, Math.abs(theta));
  const share = (100 * slip) / movement;
  return Number.isFinite(share) ? share : null;
}
