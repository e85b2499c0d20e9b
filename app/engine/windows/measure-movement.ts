import { mean } from "#app/engine/math/moments.ts";
import type { ExpectedMovement, Movement } from "#app/engine/types.ts";
import { samplesIn } from "#app/engine/windows/find-onsets.ts";

/** Reach of the search in expected durations; without an expectation in ms. */
const AMPLITUDE_REACH = 2;
const DURATION_REACH = 3;
const REACH_MS = 500;
/** The movement lasts as long as |ω| stays at or over this share of its peak. */
const END_SHARE = 0.05;
const LEAST_RUN_MS = 10;

export interface MovementSearch {
  /** Angle and velocity filtered for finding onsets; NaN where a sample has no value. */
  angleRad: Float64Array;
  velocityRadPerS: Float64Array;
  rateHz: number;
  onset: number;
  nextOnset: number | null;
  /** Half-open range of the baseline. */
  baseline: readonly [number, number];
  thresholdRadPerS: number;
  expected: ExpectedMovement | null;
}

/**
 * Size, length and direction of the movement after an onset, from the onset alone, so that a window
 * set by hand is measured as one that was found.
 *
 * - amplitude: largest |angle − baseline mean| within 2 expected durations;
 * - duration: onset to the last sample, within 3 expected durations, of the unbroken run of
 *   |ω| ≥ 5 % of its peak that holds the peak;
 *
 * both within 500 ms where nothing is expected, and never into the next onset. The peak is that of
 * the first run over the onset's threshold, so that a fast return movement is not taken for it;
 * where nothing is over the threshold, the largest |ω|.
 */
export function measureMovement(search: MovementSearch): Movement {
  const { angleRad, velocityRadPerS: velocity, rateHz, onset, expected } = search;
  const reach = (durations: number) => {
    const ms = expected ? durations * expected.durationMs : REACH_MS;
    const last = onset + Math.round((ms * rateHz) / 1000);
    return lastValue(
      velocity,
      onset,
      search.nextOnset === null ? last : Math.min(last, search.nextOnset - 1),
    );
  };

  const durationLimit = reach(DURATION_REACH);
  const peak = peakOf(
    velocity,
    onset,
    durationLimit,
    samplesIn(LEAST_RUN_MS, rateHz),
    search.thresholdRadPerS,
  );
  if (peak === null) {
    return { sign: null, amplitudeDeg: null, durationMs: null, peakVelocityRadPerS: null };
  }
  const speed = Math.abs(velocity[peak] as number);
  let last = peak;
  while (last < durationLimit && Math.abs(velocity[last + 1] as number) >= END_SHARE * speed)
    last++;

  const largest = largestRelative(angleRad, onset, reach(AMPLITUDE_REACH), search.baseline);
  return {
    sign: signOf(largest ?? (velocity[peak] as number)),
    amplitudeDeg: largest === null ? null : (Math.abs(largest) * 180) / Math.PI,
    durationMs: speed === 0 ? null : ((last - onset) * 1000) / rateHz,
    peakVelocityRadPerS: speed,
  };
}

/** Whether a movement is too long or too short to be the expected one: over twice or under half. */
export function isOtherMovement(movement: Movement, expected: ExpectedMovement | null): boolean {
  if (expected === null || movement.durationMs === null) return false;
  return (
    movement.durationMs > 2 * expected.durationMs || movement.durationMs < expected.durationMs / 2
  );
}

/** Last sample from `onset` to `last` before one without a value; onset − 1 where there is none. */
function lastValue(velocity: Float64Array, onset: number, last: number): number {
  let i = onset - 1;
  while (i < last && i + 1 < velocity.length && !Number.isNaN(velocity[i + 1])) i++;
  return i;
}

function peakOf(
  velocity: Float64Array,
  from: number,
  to: number,
  leastRun: number,
  threshold: number,
): number | null {
  let overall: number | null = null;
  let ofRun = from;
  let run = 0;
  for (let i = from; i <= to + 1; i++) {
    const speed = i <= to ? Math.abs(velocity[i] as number) : 0;
    if (i <= to && (overall === null || speed > Math.abs(velocity[overall] as number))) overall = i;
    if (speed > threshold) {
      if (run === 0 || speed > Math.abs(velocity[ofRun] as number)) ofRun = i;
      run++;
    } else {
      if (run >= leastRun) return ofRun;
      run = 0;
    }
  }
  return overall;
}

/** The relative angle with the largest size; null where the baseline or the reach has no values. */
function largestRelative(
  angleRad: Float64Array,
  from: number,
  to: number,
  [baselineStart, baselineEnd]: readonly [number, number],
): number | null {
  if (baselineStart < 0 || baselineEnd > angleRad.length || baselineEnd <= baselineStart)
    return null;
  const level = mean(angleRad, baselineStart, baselineEnd);
  if (Number.isNaN(level)) return null;
  let largest: number | null = null;
  for (let i = from; i <= to; i++) {
    const relative = (angleRad[i] as number) - level;
    if (largest === null || Math.abs(relative) > Math.abs(largest)) largest = relative;
  }
  return largest;
}

function signOf(value: number): 1 | -1 | null {
  if (value > 0) return 1;
  return value < 0 ? -1 : null;
}
