import { mean, sampleSd } from "#app/engine/math/moments.ts";
import { tQuantile } from "#app/engine/math/student-t.ts";
import type { Interval } from "#app/engine/types.ts";

export interface WindowSpread {
  mean: number;
  /** null for one window. */
  sd: number | null;
  t: Interval | null;
}

/**
 * Mean of the window estimates and its interval by Student's t, mean ± t(n − 1) · SD / √n: windows
 * are the replicates, samples within a window are not.
 *
 * @returns null for no windows
 */
export function windowSpread(estimates: readonly number[], level: number): WindowSpread | null {
  const n = estimates.length;
  if (n === 0) return null;
  const centre = mean(estimates);
  if (n === 1) return { mean: centre, sd: null, t: null };
  const sd = sampleSd(estimates);
  const half = (tQuantile(1 - (1 - level) / 2, n - 1) * sd) / Math.sqrt(n);
  return { mean: centre, sd, t: [centre - half, centre + half] };
}
