import type { AxisSignals, PreparedAxis, Signals, WindowSpan } from "#app/engine/types.ts";

/** Why a window cannot be fitted, before any fit, in the order in which one hides the next. */
export type Exclusion =
  | "start_of_recording"
  | "end_of_recording"
  | "missing_samples"
  | "duplicate"
  | "gap"
  | "other_movement"
  | "overlap";

export interface WindowPlace {
  signals: Signals;
  recorded: AxisSignals;
  prepared: PreparedAxis;
  span: WindowSpan;
  /** Of the same axis. */
  nextOnset: number | null;
  underWay: boolean;
  otherMovement: boolean;
  /** Kept by a person: other movements and overlaps are then no reason. */
  byHand: boolean;
}

/**
 * The first reason for which a window is excluded; null where it can be fitted.
 *
 * The samples at the ends of a stretch that the derivatives need belong to what ends the stretch:
 * the recording's start or end, else `gap`.
 */
export function exclusionOf(place: WindowPlace): Exclusion | null {
  const { signals, span, nextOnset } = place;
  const { spanStart, spanEnd } = span;
  if (spanStart < 0 || spanStart < unvaluedAtStart(place)) return "start_of_recording";
  if (spanEnd >= signals.samples || spanEnd >= signals.samples - unvaluedAtEnd(place)) {
    return "end_of_recording";
  }
  let [missing, unvalued] = [false, false];
  for (let i = spanStart; i <= spanEnd; i++) {
    missing ||= !isRecorded(place, i);
    unvalued ||= !hasValue(place.prepared, i);
  }
  if (missing) return "missing_samples";
  if (anyWithin(signals.duplicateBefore, spanStart, spanEnd + 1)) return "duplicate";
  if (unvalued || place.underWay || anyWithin(signals.gapBefore, spanStart, spanEnd + 1)) {
    return "gap";
  }
  if (place.otherMovement && !place.byHand) return "other_movement";
  if (nextOnset !== null && spanEnd >= nextOnset && !place.byHand) return "overlap";
  return null;
}

/** Whether the sorted list holds an index within [from, to]. */
function anyWithin(sorted: readonly number[], from: number, to: number): boolean {
  let low = 0;
  let high = sorted.length;
  while (low < high) {
    const middle = (low + high) >> 1;
    if ((sorted[middle] as number) < from) low = middle + 1;
    else high = middle;
  }
  return low < sorted.length && (sorted[low] as number) <= to;
}

function isRecorded({ signals, recorded }: WindowPlace, i: number): boolean {
  return !(
    Number.isNaN(signals.timeS[i]) ||
    Number.isNaN(recorded.angle.si[i]) ||
    Number.isNaN(recorded.torqueNm[i]) ||
    (recorded.limbAngle !== null && Number.isNaN(recorded.limbAngle.si[i]))
  );
}

function hasValue(prepared: PreparedAxis, i: number): boolean {
  // Finite: a calibration may take a value out of the range of numbers.
  return (
    Number.isFinite(prepared.velocityRadPerS[i]) &&
    Number.isFinite(prepared.accelerationRadPerS2[i]) &&
    Number.isFinite(prepared.torqueNm[i])
  );
}

/** Samples from the recording's first on that were recorded without a break and have no value. */
function unvaluedAtStart(place: WindowPlace): number {
  const { signals, prepared } = place;
  let i = 0;
  while (
    i < signals.samples &&
    !hasValue(prepared, i) &&
    isRecorded(place, i) &&
    (i === 0 || !breaksBefore(signals, i))
  ) {
    i++;
  }
  return i;
}

/** The same back from the recording's last sample. */
function unvaluedAtEnd(place: WindowPlace): number {
  const { signals, prepared } = place;
  let n = 0;
  for (let i = signals.samples - 1; i >= 0; i--, n++) {
    if (hasValue(prepared, i) || !isRecorded(place, i)) break;
    if (n > 0 && breaksBefore(signals, i + 1)) break;
  }
  return n;
}

function breaksBefore(signals: Signals, i: number): boolean {
  return anyWithin(signals.gapBefore, i, i) || anyWithin(signals.duplicateBefore, i, i);
}
