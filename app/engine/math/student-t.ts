import stdlibQuantile from "@stdlib/stats-base-dists-t-quantile";

/**
 * Quantile of Student's t.
 *
 * @param probability  strictly within 0 and 1
 * @param degreesOfFreedom  over 0
 * @throws RangeError outside of these
 */
export function tQuantile(probability: number, degreesOfFreedom: number): number {
  if (!(probability > 0 && probability < 1)) throw new RangeError(`probability ${probability}`);
  if (!(degreesOfFreedom > 0)) throw new RangeError(`${degreesOfFreedom} degrees of freedom`);
  return stdlibQuantile(probability, degreesOfFreedom);
}
