import { parabolaVertex } from "#app/engine/math/parabola.ts";

/**
 * Delay of the torque that is left in: the shift with the smallest residual, over all windows each
 * fitted on its own, by a parabola through it and its neighbours.
 *
 * @param profiles  of each window: residual sum of squares by shift in samples, 0 in the middle
 * @returns ms, positive where the torque is late; null at an end of the range or without profiles
 */
export function lagEstimateMs(profiles: readonly Float64Array[], rateHz: number): number | null {
  if (profiles.length === 0) return null;
  // Rates that differ in the last digits may reach one sample less far.
  const length = profiles.reduce((least, profile) => Math.min(least, profile.length), Infinity);
  if (length < 3) return null;
  const sums = new Float64Array(length);
  for (const profile of profiles) {
    const cut = (profile.length - length) / 2;
    for (let k = 0; k < length; k++) sums[k] = (sums[k] as number) + (profile[k + cut] as number);
  }
  let best = 0;
  for (let k = 1; k < length; k++) if ((sums[k] as number) < (sums[best] as number)) best = k;
  if (best === 0 || best === length - 1) return null;
  const vertex = parabolaVertex(
    sums[best - 1] as number,
    sums[best] as number,
    sums[best + 1] as number,
  );
  if (vertex === null) return null;
  return ((best + vertex.offset - (length - 1) / 2) * 1000) / rateHz;
}
