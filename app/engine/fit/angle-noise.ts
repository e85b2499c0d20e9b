import { leastSquares, predict } from "#app/engine/math/least-squares.ts";
import { sampleSd, sumOfSquares } from "#app/engine/math/moments.ts";
import type { PreparedAxis, WindowColumns } from "#app/engine/types.ts";

/** Pull of angle noise on I, in percent, that is flagged on its own. */
export const ANGLE_NOISE_LIMIT_PCT = 2;
/** Quiet stretch before the onset in which α is noise, ms. */
const QUIET_MS = [-150, -50] as const;

/**
 * About the share in percent by which noise in the angle pulls I to 0 (errors in variables): the
 * variance of α over 150 to 50 ms before the onset over the mean square of the part of α in the
 * window that θ and ω do not explain.
 *
 * @returns null where the quiet stretch has no values or θ and ω explain all of α
 */
export function angleNoisePct(
  prepared: PreparedAxis,
  onset: number,
  columns: WindowColumns,
  rateHz: number,
): number | null {
  const from = onset + Math.round((QUIET_MS[0] * rateHz) / 1000);
  const to = onset + Math.round((QUIET_MS[1] * rateHz) / 1000);
  if (from < 0 || to > prepared.accelerationRadPerS2.length || to - from < 2) return null;
  const noise = sampleSd(prepared.accelerationRadPerS2, from, to) ** 2;
  const own = unexplained(columns);
  return Number.isNaN(noise) || own === null || own === 0 ? null : (100 * noise) / own;
}

/** Mean square of what is left of α after θ and ω. */
function unexplained({
  angleRad,
  velocityRadPerS,
  accelerationRadPerS2,
}: WindowColumns): number | null {
  const n = accelerationRadPerS2.length;
  const solution = leastSquares([angleRad, velocityRadPerS], accelerationRadPerS2);
  if (solution.status === "singular") return null;
  const explained = predict([angleRad, velocityRadPerS], solution.coefficients, 0, n);
  return sumOfSquares(accelerationRadPerS2.map((alpha, i) => alpha - (explained[i] as number))) / n;
}
