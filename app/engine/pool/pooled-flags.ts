import type { FlagCode } from "#app/engine/errors.ts";
import type { WindowSpread } from "#app/engine/pool/interval.ts";

/**
 * Whether noise in the angle pulls I to 0 by more than the limit or by more than half of the
 * half-width of I's interval, which does not hold that pull.
 *
 * @param sharesPct  of the windows that have one
 */
export function isPulledByNoise(
  sharesPct: readonly number[],
  inertia: WindowSpread | null,
  limitPct: number,
): boolean {
  if (sharesPct.length === 0) return false;
  const share = sharesPct.reduce((sum, value) => sum + value, 0) / sharesPct.length;
  if (share > limitPct) return true;
  if (!inertia?.t) return false;
  const halfWidthPct = (100 * (inertia.t[1] - inertia.t[0])) / 2 / Math.abs(inertia.mean);
  return share > halfWidthPct / 2;
}

/** Flags of the windows as replicates: too few of them, or each like the one before it. */
export function replicateFlags(windows: number, orderLag1: number | null): FlagCode[] {
  const codes: FlagCode[] = [];
  if (windows < 2) codes.push("too_few_windows");
  if (orderLag1 !== null && orderLag1 > 2 / Math.sqrt(windows)) codes.push("windows_related");
  return codes;
}
