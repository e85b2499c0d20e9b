import type { AxisSignals, WindowSpan } from "#app/engine/types.ts";

/** Samples in a row at a channel's extreme raw value that count as clipped. */
const CLIPPED_SAMPLES = 5;
/** What moves slower than this share of the movement's peak is held, not clipped. */
const MOVING_SHARE = 0.05;

/**
 * Whether a channel of the axis stands at its extreme raw value for 5 samples in a row inside the
 * span while the joint moves.
 *
 * @param velocityRadPerS, peakVelocityRadPerS  of the angle filtered for finding onsets
 */
export function isClipped(
  recorded: AxisSignals,
  velocityRadPerS: Float64Array,
  peakVelocityRadPerS: number | null,
  { spanStart, spanEnd }: WindowSpan,
): boolean {
  if (peakVelocityRadPerS === null) return false;
  const least = MOVING_SHARE * peakVelocityRadPerS;
  const { angle, limbAngle, torqueChannels } = recorded;
  const channels = [angle, ...(limbAngle ? [limbAngle] : []), ...torqueChannels];
  return channels.some(({ clippedRun, constant }) => {
    if (constant) return false;
    let run = 0;
    for (let i = spanStart; i <= spanEnd; i++) {
      const clipped = clippedRun[i] === 1 && Math.abs(velocityRadPerS[i] as number) > least;
      run = clipped ? run + 1 : 0;
      if (run >= CLIPPED_SAMPLES) return true;
    }
    return false;
  });
}

/** Whether a missing sample of the axis was filled inside the span. */
export function isFilled(recorded: AxisSignals, { spanStart, spanEnd }: WindowSpan): boolean {
  const { angle, limbAngle, torqueChannels } = recorded;
  const channels = [angle, ...(limbAngle ? [limbAngle] : []), ...torqueChannels];
  return channels.some(({ filled }) => {
    for (let i = spanStart; filled && i <= spanEnd; i++) if (filled[i] === 1) return true;
    return false;
  });
}
