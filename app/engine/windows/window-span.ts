import type { WindowSpan } from "#app/engine/types.ts";

/**
 * Sample indices of a window: onset + round(ms · rate / 1000), the baseline half-open, the window
 * closed. Indices may lie outside of the recording; exclusion looks after that.
 *
 * @param windowMs, baselineMs  after the onset, ms
 */
export function windowSpan(
  onset: number,
  windowMs: readonly [number, number],
  baselineMs: readonly [number, number],
  rateHz: number,
): WindowSpan {
  const at = (ms: number) => onset + Math.round((ms * rateHz) / 1000);
  const [baselineStart, baselineEnd] = [at(baselineMs[0]), at(baselineMs[1])];
  const [start, end] = [at(windowMs[0]), at(windowMs[1])];
  return {
    onset,
    baselineStart,
    baselineEnd,
    start,
    end,
    spanStart: Math.min(baselineStart, start),
    spanEnd: Math.max(baselineEnd, end),
  };
}
