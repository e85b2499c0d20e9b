import { mean, sampleSd } from "../math/moments.ts";
import { tQuantile } from "../math/student-t.ts";
import type { Interval } from "../types.ts";

export interface OverParticipants {
  /** Participants with a value. */
  n: number;
  /** Null without any. */
  mean: number | null;
  /** n − 1 below it; null for fewer than two. */
  sd: number | null;
  /** mean ± t(n − 1) · sd / √n; null for fewer than two. */
  interval: Interval | null;
}

/**
 * Mean over participants, each one value, with Student's t interval. The participant is the unit:
 * windows are never counted here.
 *
 * @param values  one of each participant in any one unit; null where a participant has none
 * @param level  within 0 and 1, as in 0.95
 */
export function meanOverParticipants(
  values: readonly (number | null)[],
  level = 0.95,
): OverParticipants {
  const known = values.filter((value) => value !== null);
  const n = known.length;
  if (n === 0) return { n, mean: null, sd: null, interval: null };
  const centre = mean(known);
  if (n < 2) return { n, mean: centre, sd: null, interval: null };
  const sd = sampleSd(known);
  const half = (tQuantile(1 - (1 - level) / 2, n - 1) * sd) / Math.sqrt(n);
  return { n, mean: centre, sd, interval: [centre - half, centre + half] };
}
