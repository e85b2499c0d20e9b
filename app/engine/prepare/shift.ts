import type { Segment } from "#app/engine/types.ts";

/**
 * Takes a delay out of a signal, T(t) ← T(t + lag), by linear interpolation within each segment.
 *
 * @param lagMs  positive: the signal is late
 * @returns a new array as long as `x`; NaN outside the segments and where t + lag leaves t's own
 */
export function shiftEarlier(
  x: Float64Array,
  segments: readonly Segment[],
  rateHz: number,
  lagMs: number,
): Float64Array {
  const y = new Float64Array(x.length).fill(Number.NaN);
  const lagSamples = wholeWhereNear((lagMs * rateHz) / 1000);
  const whole = Math.floor(lagSamples);
  const fraction = lagSamples - whole;
  for (const { start, end } of segments) {
    for (let i = start; i < end; i++) {
      const below = i + whole;
      const above = fraction === 0 ? below : below + 1;
      if (below < start || above >= end) continue;
      const left = x[below] as number;
      const right = x[above] as number;
      y[i] = fraction === 0 ? left : left + fraction * (right - left);
    }
  }
  return y;
}

/** A measured rate is off by some 1e-9; a lag of whole samples should not lose its last one to that. */
function wholeWhereNear(samples: number): number {
  const whole = Math.round(samples);
  return Math.abs(samples - whole) < 1e-6 ? whole : samples;
}
