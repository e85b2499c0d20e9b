import { EngineError, quoted } from "#app/engine/errors.ts";
import { siConversion, toSi } from "#app/engine/math/units.ts";
import type { Segment, Unit } from "#app/engine/types.ts";

export interface TimeBase {
  /** Stamp of each sample in the file's own time, s; NaN where missing. */
  timeS: Float64Array;
  rateHz: number;
  durationS: number;
  segments: Segment[];
  gapBefore: number[];
  duplicateBefore: number[];
  /** A regular step is off the median by more than 1 %. */
  jitter: boolean;
}

/** A step of at least this many medians is a gap. */
const GAP_MEDIANS = 1.5;
const JITTER_SHARE = 0.01;
const MOST_DUPLICATES = 0.05;
/** Stamps are rounded decimals: a step may miss its bound by this share of the median. */
const ROUNDING = 1e-6;

/** The time base of a stated rate: the first sample at 0, no gaps. */
export function statedTimeBase(samples: number, rateHz: number): TimeBase {
  const timeS = new Float64Array(samples);
  for (let i = 0; i < samples; i++) timeS[i] = i / rateHz;
  return {
    timeS,
    rateHz,
    durationS: (samples - 1) / rateHz,
    segments: [{ start: 0, end: samples }],
    gapBefore: [],
    duplicateBefore: [],
    jitter: false,
  };
}

/**
 * The time base of a column of stamps.
 *
 * The median step (the mean one if the median is 0) tells regular steps from gaps (at least 1.5
 * medians) and duplicates (0); the rate is the reciprocal of the MEAN of the regular steps, so that
 * stamps rounded to a coarse unit still give the true rate.
 *
 * @param stamps  raw stamps, NaN where missing; they become `timeS` in place
 * @param lineOf  physical line of a row, for refusals
 * @throws EngineError "unreadable" where time runs backwards, hardly moves or is missing
 */
export function stampedTimeBase(
  stamps: Float64Array,
  unit: Unit,
  column: string,
  lineOf: (row: number) => number,
): TimeBase {
  const samples = stamps.length;
  const steps = new Float64Array(samples);
  let count = 0;
  let zeros = 0;
  let first = -1;
  let last = -1;
  for (let i = 0; i < samples; i++) {
    const stamp = stamps[i] as number;
    if (Number.isNaN(stamp)) continue;
    if (last >= 0) {
      const step = stamp - (stamps[last] as number);
      if (step < 0) {
        throw new EngineError(
          "unreadable",
          `Time runs backwards in line ${lineOf(i)}: the stamp in column ${quoted(column)} is earlier than the one before.`,
          { line: lineOf(i) },
        );
      }
      if (last === i - 1) {
        steps[count++] = step;
        if (step === 0) zeros++;
      }
    } else first = i;
    last = i;
  }
  if (count === 0) {
    throw new EngineError(
      "unreadable",
      `The column ${quoted(column)} holds no two time stamps in a row; map another column or state the sampling rate (rate_hz).`,
    );
  }
  if (zeros > MOST_DUPLICATES * count) {
    throw new EngineError(
      "unreadable",
      `The stamps in column ${quoted(column)} are too coarse (time_too_coarse): ${zeros} of ${count} steps are 0; state the sampling rate (rate_hz) instead.`,
    );
  }

  const reference = referenceStep(steps.subarray(0, count));
  const gapFrom = reference * (GAP_MEDIANS - ROUNDING);
  const offBy = reference * (JITTER_SHARE + ROUNDING);
  const segments: Segment[] = [];
  const gapBefore: number[] = [];
  const duplicateBefore: number[] = [];
  let jitter = false;
  let start = -1;
  for (let i = 0; i <= samples; i++) {
    const stamp = stamps[i] ?? Number.NaN;
    const step = i === 0 ? Number.NaN : stamp - (stamps[i - 1] as number);
    const regular = step > 0 && step < gapFrom;
    if (step === 0) duplicateBefore.push(i);
    else if (step >= gapFrom) gapBefore.push(i);
    else if (regular) jitter ||= Math.abs(step - reference) > offBy;
    if (!regular && start >= 0) {
      segments.push({ start, end: i });
      start = -1;
    }
    if (start < 0 && !Number.isNaN(stamp)) start = i;
  }
  // All steps inside a stretch are regular, so their sum is the stretch's length.
  let regular = 0;
  let sum = 0;
  for (const { start, end } of segments) {
    regular += end - 1 - start;
    sum += (stamps[end - 1] as number) - (stamps[start] as number);
  }
  if (regular === 0) {
    throw new EngineError(
      "unreadable",
      `No two steps of the stamps in column ${quoted(column)} are alike; map another column or state the sampling rate (rate_hz).`,
    );
  }
  const durationS = toSi((stamps[last] as number) - (stamps[first] as number), unit);
  const si = siConversion(unit);
  for (let i = 0; i < samples; i++) stamps[i] = si(stamps[i] as number);
  return {
    timeS: stamps,
    // The unit first: 5 791 steps in 5 791 ms are then 1 000 Hz to the last bit.
    rateHz: regular / toSi(1, unit) / sum,
    durationS,
    segments,
    gapBefore,
    duplicateBefore,
    jitter,
  };
}

/** The median step, or the mean one if the median is 0; reorders `steps`. */
function referenceStep(steps: Float64Array): number {
  const middle = steps.length >> 1;
  const upper = select(steps, middle);
  const median =
    steps.length % 2 === 1
      ? upper
      : (upper + steps.subarray(0, middle).reduce((a, b) => Math.max(a, b))) / 2;
  return median > 0 ? median : steps.reduce((a, b) => a + b, 0) / steps.length;
}

/**
 * The k-th smallest value, with the smaller ones moved before it (Hoare 1961, algorithm 65): sorting
 * millions of steps would cost more than reading them.
 */
function select(values: Float64Array, k: number): number {
  let low = 0;
  let high = values.length - 1;
  while (low < high) {
    const pivot = values[(low + high) >> 1] as number;
    let i = low;
    let j = high;
    while (i <= j) {
      while ((values[i] as number) < pivot) i++;
      while ((values[j] as number) > pivot) j--;
      if (i <= j) {
        const swap = values[i] as number;
        values[i++] = values[j] as number;
        values[j--] = swap;
      }
    }
    if (k <= j) high = j;
    else if (k >= i) low = i;
    else break;
  }
  return values[k] as number;
}
