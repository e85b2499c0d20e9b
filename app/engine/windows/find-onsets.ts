import { mean, sampleSd } from "#app/engine/math/moments.ts";
import type { ExpectedMovement, Segment } from "#app/engine/types.ts";

/** Share of the expected (or largest) peak velocity that a movement has to exceed. */
const THRESHOLD_SHARE = 0.25;
/** Least threshold without an expectation: 5 deg/s. */
const LEAST_THRESHOLD_RAD_PER_S = (5 * Math.PI) / 180;
/** A movement stays over the threshold at least this long. */
const LEAST_RUN_MS = 10;
/** Quiet stretch before the crossing whose mean and SD bound the movement's foot. */
const QUIET_MS = [-150, -50] as const;
const FOOT_SDS = 3;
/** Share of the movement's own peak velocity that ends its foot. */
const FOOT_SHARE = 0.05;
/** Peak velocity of a minimum-jerk ramp over its mean velocity (Flash & Hogan 1985). */
const PEAK_OVER_MEAN = 1.875;

export interface FoundOnset {
  /** Sample. */
  onset: number;
  /** The movement was under way when its gap-free stretch began: its true onset is not in there. */
  underWay: boolean;
}

export interface OnsetSearch {
  /** ω of the angle filtered for finding onsets, rad/s; NaN where a sample has no value. */
  velocityRadPerS: Float64Array;
  segments: readonly Segment[];
  /** Stamp of each sample, s. */
  timeS: Float64Array;
  rateHz: number;
  thresholdRadPerS: number;
  minSeparationMs: number;
}

/**
 * The |ω| that a movement must exceed: a quarter of the expected peak velocity, 1.875 · A / D, or
 * without an expectation the larger of a quarter of the recording's largest |ω| and 5 deg/s.
 */
export function onsetThreshold(
  velocityRadPerS: Float64Array,
  expected: ExpectedMovement | null,
): number {
  if (expected) {
    const amplitudeRad = (expected.amplitudeDeg * Math.PI) / 180;
    return (THRESHOLD_SHARE * PEAK_OVER_MEAN * amplitudeRad) / (expected.durationMs / 1000);
  }
  let largest = 0;
  for (const value of velocityRadPerS) {
    const speed = Math.abs(value);
    if (speed > largest) largest = speed;
  }
  return Math.max(THRESHOLD_SHARE * largest, LEAST_THRESHOLD_RAD_PER_S);
}

/**
 * Onsets on |ω|: a crossing of the threshold that lasts ≥ 10 ms, then back to the first sample of
 * the unbroken run with |ω − mean| > max(3 SD, 5 % of the movement's peak |ω|), mean and SD over
 * 150 to 50 ms before the crossing. What begins within the least separation of the last accepted
 * onset is none, also across gaps.
 *
 * The movement's peak is the largest |ω| of the run over the threshold.
 */
export function findOnsets(search: OnsetSearch): FoundOnset[] {
  const { velocityRadPerS: velocity, segments, timeS, rateHz, thresholdRadPerS } = search;
  const leastRun = samplesIn(LEAST_RUN_MS, rateHz);
  const found: FoundOnset[] = [];
  let last = Number.NEGATIVE_INFINITY;
  for (const segment of segments) {
    const { start, end } = withValues(velocity, segment);
    let bound = start;
    let i = start;
    while (i < end) {
      if (!(Math.abs(velocity[i] as number) > thresholdRadPerS)) {
        i++;
        continue;
      }
      const crossing = i;
      let peak = 0;
      for (; i < end && Math.abs(velocity[i] as number) > thresholdRadPerS; i++) {
        peak = Math.max(peak, Math.abs(velocity[i] as number));
      }
      if (i - crossing < leastRun) continue;
      const onset = footOf(velocity, crossing, bound, start, peak, rateHz);
      bound = i;
      const stamp = timeS[onset] as number;
      if (tooSoon(stamp, last, search.minSeparationMs)) continue;
      found.push({ onset, underWay: onset === start });
      last = stamp;
    }
  }
  return found;
}

/**
 * Onsets from a trigger: each first sample above the middle of the trigger's range. A missing cell
 * keeps the level before it.
 */
export function findTriggerOnsets(
  trigger: Float64Array,
  timeS: Float64Array,
  minSeparationMs: number,
): FoundOnset[] {
  let least = Number.POSITIVE_INFINITY;
  let largest = Number.NEGATIVE_INFINITY;
  for (const value of trigger) {
    if (value < least) least = value;
    if (value > largest) largest = value;
  }
  const middle = least + (largest - least) / 2;
  const found: FoundOnset[] = [];
  let last = Number.NEGATIVE_INFINITY;
  let above: boolean | null = null;
  for (let i = 0; i < trigger.length; i++) {
    const value = trigger[i] as number;
    if (Number.isNaN(value)) continue;
    const rises = above === false && value > middle;
    above = value > middle;
    const stamp = timeS[i] as number;
    if (!rises || Number.isNaN(stamp) || tooSoon(stamp, last, minSeparationMs)) continue;
    found.push({ onset: i, underWay: false });
    last = stamp;
  }
  return found;
}

/** Samples that last at least so long, counted with their own step. */
export function samplesIn(ms: number, rateHz: number): number {
  // The rate is a measured mean: 10 ms at 999.9999999 Hz are 10 samples, as at 1 kHz.
  return Math.max(1, Math.ceil((ms * rateHz) / 1000 - 1e-6));
}

function tooSoon(stampS: number, lastS: number, minSeparationMs: number): boolean {
  return (stampS - lastS) * 1000 < minSeparationMs - 1e-6;
}

/** The part of a segment whose samples have a derivative. */
function withValues(velocity: Float64Array, { start, end }: Segment): Segment {
  let [from, to] = [start, end];
  while (from < to && Number.isNaN(velocity[from])) from++;
  while (to > from && Number.isNaN(velocity[to - 1])) to--;
  return { start: from, end: to };
}

function footOf(
  velocity: Float64Array,
  crossing: number,
  bound: number,
  segmentStart: number,
  peak: number,
  rateHz: number,
): number {
  const at = (ms: number) => Math.max(segmentStart, crossing + Math.round((ms * rateHz) / 1000));
  const [quietFrom, quietTo] = [at(QUIET_MS[0]), at(QUIET_MS[1])];
  const quiet = quietTo - quietFrom >= 2;
  const centre = quiet ? mean(velocity, quietFrom, quietTo) : 0;
  const sd = quiet ? sampleSd(velocity, quietFrom, quietTo) : 0;
  const limit = Math.max(FOOT_SDS * sd, FOOT_SHARE * peak);
  let onset = crossing;
  while (onset > bound && Math.abs((velocity[onset - 1] as number) - centre) > limit) onset--;
  return onset;
}
