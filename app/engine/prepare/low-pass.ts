import { butterworthLowpass } from "#app/engine/math/butterworth.ts";
import { filterZeroPhase, padSamples } from "#app/engine/math/filter.ts";
import type { Segment } from "#app/engine/types.ts";

/** A segment with fewer samples is left out whole: its ends would be all there is of it. */
export const SHORTEST_SEGMENT_SAMPLES = 20;

/**
 * Zero-phase Butterworth low-pass of each gap-free segment on its own.
 *
 * @param filter  order and −3 dB point of one pass; null passes the segments through
 * @returns a new array as long as `x`; NaN outside the segments and in those under 20 samples
 * @throws RangeError where the cut-off is not below half the rate
 */
export function lowPass(
  x: Float64Array,
  segments: readonly Segment[],
  rateHz: number,
  filter: { order: number; cutoffHz: number } | null,
): Float64Array {
  const y = new Float64Array(x.length).fill(Number.NaN);
  const sections = filter && butterworthLowpass(filter.order, filter.cutoffHz, rateHz);
  for (const { start, end } of segments) {
    const n = end - start;
    if (n < SHORTEST_SEGMENT_SAMPLES) continue;
    const part = x.subarray(start, end);
    const out = y.subarray(start, end);
    if (filter && sections) {
      filterZeroPhase(sections, part, padSamples(rateHz, filter.cutoffHz, n), out);
    } else out.set(part);
  }
  return y;
}
