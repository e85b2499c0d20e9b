import { butterworthBandpass } from "#app/engine/math/butterworth.ts";
import { filterForward } from "#app/engine/math/filter.ts";
import { mean } from "#app/engine/math/moments.ts";
import { movingRms } from "#app/engine/math/moving-rms.ts";
import type { Segment } from "#app/engine/types.ts";

const BAND_HZ = [20, 450] as const;
/** The band's upper edge is at most this share of the rate. */
const HIGHEST_SHARE = 0.45;
const ORDER = 2;
const SPAN_MS = 10;

/**
 * The level of an EMG channel for timing: mean removed, band-pass 20 to 450 Hz forwards only, then
 * the RMS over the last 10 ms. All of it looks only back, so that a burst does not show before it
 * begins (a zero-phase 6 Hz envelope would show it some 45 ms early).
 *
 * @param emg  V (or 1); NaN where a cell is missing
 * @param segments  gap-free stretches by time; each is filtered on its own, broken at missing cells
 * @returns as long as `emg`; NaN where there is no level
 */
export function movingLevel(
  emg: Float64Array,
  segments: readonly Segment[],
  rateHz: number,
): Float64Array {
  const level = new Float64Array(emg.length).fill(Number.NaN);
  const highHz = Math.min(BAND_HZ[1], HIGHEST_SHARE * rateHz);
  if (highHz <= BAND_HZ[0]) return level;
  const sections = butterworthBandpass(ORDER, BAND_HZ[0], highHz, rateHz);
  const spanSamples = Math.max(1, Math.round((SPAN_MS * rateHz) / 1000));
  for (const { start, end } of segments) {
    for (let from = start; from < end; from++) {
      let to = from;
      while (to < end && !Number.isNaN(emg[to])) to++;
      if (to === from) continue;
      const part = emg.subarray(from, to);
      const centre = mean(part);
      const filtered = filterForward(
        sections,
        part.map((value) => value - centre),
      );
      level.set(movingRms(filtered, spanSamples), from);
      from = to;
    }
  }
  return level;
}
