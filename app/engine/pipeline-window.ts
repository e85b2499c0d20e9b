import type { QuietLevel } from "#app/engine/emg/burst.ts";
import { emgTiming, quietLevel, raisedLimit } from "#app/engine/emg/burst.ts";
import { movingLevel } from "#app/engine/emg/moving-level.ts";
import type { FlagCode, ReasonCode } from "#app/engine/errors.ts";
import { FLAGS, flag } from "#app/engine/errors.ts";
import { ANGLE_NOISE_LIMIT_PCT } from "#app/engine/fit/angle-noise.ts";
import { isClipped, isFilled } from "#app/engine/fit/clipping.ts";
import type { Baseline } from "#app/engine/fit/cut-window.ts";
import { baselineOf } from "#app/engine/fit/cut-window.ts";
import { fitFlags, isCoarse, isNearEdge, isPastReflexLimit } from "#app/engine/fit/fit-flags.ts";
import { columnOf, impedanceModel } from "#app/engine/fit/fit-model.ts";
import type { WindowFit } from "#app/engine/fit/fit-window.ts";
import { fitWindow } from "#app/engine/fit/fit-window.ts";
import { movementFlags } from "#app/engine/fit/movement-flags.ts";
import { hasLateResidual } from "#app/engine/fit/quality.ts";
import { sharesOf } from "#app/engine/fit/share.ts";
import { SLIP_LIMIT_PCT } from "#app/engine/fit/slip.ts";
import type {
  AxisProtocol,
  AxisSignals,
  ExpectedMovement,
  Flag,
  Impedance,
  ImpedanceModel,
  Movement,
  PreparedAxis,
  Protocol,
  ResultEmg,
  ResultWindow,
  Signals,
  Term,
  WindowChoice,
  WindowSpan,
  WindowsDocument,
  WindowView,
} from "#app/engine/types.ts";
import { exclusionOf } from "#app/engine/windows/exclusion.ts";
import { findOnsets, findTriggerOnsets, onsetThreshold } from "#app/engine/windows/find-onsets.ts";
import { isOtherMovement, measureMovement } from "#app/engine/windows/measure-movement.ts";
import { nearestSample } from "#app/engine/windows/nearest-sample.ts";
import { windowSpan } from "#app/engine/windows/window-span.ts";

export interface RecordingInput {
  /** As given by the caller; stands in the result. */
  file: string;
  sha256: string;
  signals: Signals;
}

// ---------------------------------------------------------------- one axis of one recording

/** What does not change from window to window. */
export interface Bench {
  protocol: Protocol;
  axis: AxisProtocol;
  signals: Signals;
  recorded: AxisSignals;
  prepared: PreparedAxis;
  model: ImpedanceModel;
  rig: Impedance;
  expected: ExpectedMovement | null;
  thresholdRadPerS: number;
  /** Moving level of each EMG channel. */
  levels: Float64Array[];
}

export function benchOf(
  signals: Signals,
  prepared: PreparedAxis,
  protocol: Protocol,
  index: number,
  rig: Impedance,
): Bench {
  const expected = expectedOf(protocol);
  const threshold = () => onsetThreshold(prepared.onsetVelocityRadPerS, expected);
  return {
    protocol,
    axis: protocol.axes[index] as AxisProtocol,
    signals,
    recorded: signals.axes[index] as AxisSignals,
    prepared,
    model: impedanceModel(protocol.model),
    rig,
    expected,
    thresholdRadPerS: expected ? threshold() : remembered(thresholds, prepared, threshold),
    levels: remembered(emgLevels, signals, () =>
      signals.emg.map(({ channel }) => movingLevel(channel.si, signals.segments, signals.rateHz)),
    ),
  };
}

/** Kept as long as the columns they come from, so that a drag does not make them again. */
const thresholds = new WeakMap<PreparedAxis, number>();
const emgLevels = new WeakMap<Signals, Float64Array[]>();
const quietLevels = new WeakMap<Float64Array, Map<number, QuietLevel | null>>();
const keptWindows = new WeakMap<PreparedAxis, Map<string, boolean>>();

function remembered<K extends object, V>(memory: WeakMap<K, V>, key: K, make: () => V): V {
  const known = memory.get(key);
  if (known !== undefined) return known;
  const made = make();
  memory.set(key, made);
  return made;
}

export function expectedOf({ onset }: Protocol): ExpectedMovement | null {
  const { expected_amplitude_deg: amplitudeDeg, expected_duration_ms: durationMs } = onset;
  return amplitudeDeg === null || durationMs === null ? null : { amplitudeDeg, durationMs };
}

export function rigOf(protocol: Protocol, index: number): Impedance {
  const { rig } = protocol;
  if (typeof rig.K === "number") return rig as Impedance;
  const name = (protocol.axes[index] as AxisProtocol).name;
  return (rig as Record<string, Impedance>)[name] ?? { K: 0, B: 0, I: 0 };
}

// ---------------------------------------------------------------- places of windows

/** Where a window stands and what is known of it before it is fitted. */
export interface Place {
  onset: number;
  nextOnset: number | null;
  underWay: boolean;
  windowMs: [number, number];
  /** Not set aside by a person. */
  included: boolean;
  reason: string | null;
  /** A person's window: kept although it is another movement or overlaps. */
  byHand: boolean;
}

export function foundPlaces(bench: Bench): Place[] {
  const { protocol, signals, prepared } = bench;
  const { onset } = protocol;
  const found =
    onset.from === "trigger"
      ? findTriggerOnsets(
          signals.trigger ?? new Float64Array(0),
          signals.timeS,
          onset.min_separation_ms,
        )
      : findOnsets({
          velocityRadPerS: prepared.onsetVelocityRadPerS,
          segments: prepared.onsetSegments,
          timeS: signals.timeS,
          rateHz: signals.rateHz,
          thresholdRadPerS: bench.thresholdRadPerS,
          minSeparationMs: onset.min_separation_ms,
        });
  return found.map((each, i) => ({
    ...each,
    nextOnset: found[i + 1]?.onset ?? null,
    windowMs: protocol.window_ms,
    included: true,
    reason: null,
    byHand: false,
  }));
}

/** A person's windows, in the order in which they come. */
export function chosenPlaces(
  bench: Bench,
  choices: readonly Omit<WindowChoice, "axis">[],
): Place[] {
  const onsets = choices.map(({ onset_s }) => nearestSample(bench.signals.timeS, onset_s) ?? 0);
  const sorted = [...new Set(onsets)].sort((a, b) => a - b);
  return choices.map((choice, i) => {
    const onset = onsets[i] as number;
    return {
      onset,
      nextOnset: sorted[sorted.indexOf(onset) + 1] ?? null,
      underWay: false,
      windowMs: choice.window_ms,
      included: choice.included,
      reason: choice.reason,
      byHand: true,
    };
  });
}

export function placesOf(bench: Bench, sha256: string, windows: WindowsDocument | null): Place[] {
  const named = windows?.windows.filter((entry) => entry.recording_sha256 === sha256) ?? [];
  if (named.length === 0) return foundPlaces(bench);
  return chosenPlaces(
    bench,
    named.filter(({ axis }) => axis === bench.axis.name),
  ).sort((a, b) => a.onset - b.onset);
}

// ---------------------------------------------------------------- one window

/** A window as measured and, where nothing speaks against it, fitted. */
export interface Examined {
  place: Place;
  span: WindowSpan;
  movement: Movement;
  baseline: Baseline | null;
  /** null where it is not fitted. */
  fit: WindowFit | null;
  /** Why it is not fitted: a code, or a person's sentence; null also where a person gave none. */
  reason: string | null;
}

export function examine(bench: Bench, place: Place): Examined {
  const { protocol, signals, prepared, expected } = bench;
  const span = windowSpan(place.onset, place.windowMs, protocol.baseline_ms, signals.rateHz);
  const movement = measureMovement({
    angleRad: prepared.onsetAngleRad,
    velocityRadPerS: prepared.onsetVelocityRadPerS,
    rateHz: signals.rateHz,
    onset: place.onset,
    nextOnset: place.nextOnset,
    baseline: [span.baselineStart, span.baselineEnd],
    thresholdRadPerS: bench.thresholdRadPerS,
    expected,
  });
  const baseline = baselineOf(prepared, span);
  const aside = (reason: string | null) => ({ place, span, movement, baseline, fit: null, reason });
  if (!place.included) return aside(place.reason);
  const excluded = exclusionOf({
    signals,
    recorded: bench.recorded,
    prepared,
    span,
    nextOnset: place.nextOnset,
    underWay: place.underWay,
    otherMovement: isOtherMovement(movement, expected),
    byHand: place.byHand,
  });
  if (excluded !== null) return aside(excluded satisfies ReasonCode);
  // Samples that are all there leave only a baseline of no samples.
  if (baseline === null) return aside("too_short" satisfies ReasonCode);
  const fit = fitWindow(prepared, span, baseline, bench.rig, bench.model, signals.rateHz);
  if (fit.status !== "fitted") return aside(fit.status satisfies ReasonCode);
  return { place, span, movement, baseline, fit, reason: null };
}

export function resultWindow(bench: Bench, examined: Examined, recording: number): ResultWindow {
  const { axis, signals } = bench;
  const { place, movement, baseline, fit, reason } = examined;
  const { sign } = movement;
  const parameters = fit?.fit.parameters;
  const quality = fit?.quality;
  const emg = emgOf(bench, place);
  const codes = windowFlags(bench, examined);
  if (emg.some(({ burst }) => burst)) codes.push("emg_burst");
  return {
    recording,
    axis: axis.name,
    direction: sign === null ? null : sign > 0 ? axis.positive : axis.negative,
    onset_s: signals.timeS[place.onset] as number,
    window_ms: [...place.windowMs],
    amplitude_deg: movement.amplitudeDeg,
    duration_ms: movement.durationMs,
    background_torque: baseline?.torqueNm ?? null,
    included: fit !== null,
    reason,
    K: parameters?.K ?? null,
    B: parameters?.B ?? null,
    I: parameters?.I ?? null,
    vaf_pct: quality?.vaf_pct ?? null,
    vaf_uncentred_pct: quality?.vaf_uncentred_pct ?? null,
    rms_residual: quality?.rms_residual ?? null,
    condition_number: fit?.fit.conditionNumber ?? null,
    lag1: quality?.lag1 ?? null,
    slip_pct: fit?.slipPct ?? null,
    emg,
    flags: flagsOf(codes),
  };
}

/** What the movement says of itself, and for a fitted window what its fit says. */
function windowFlags(bench: Bench, { place, span, movement, baseline, fit }: Examined): FlagCode[] {
  const { protocol, signals, recorded, prepared, model } = bench;
  const codes = movementFlags(
    movement,
    bench.expected,
    baseline?.torqueNm ?? null,
    protocol.background,
  );
  if (fit === null) return codes;
  codes.push(...fitFlags(fit.fit, model, fit.quality.vaf_pct));
  const add = (code: FlagCode, holds: boolean) => {
    if (holds) codes.push(code);
  };
  add("late_residual", hasLateResidual(fit.fit.residualNm));
  add("coarse_sampling", isCoarse(protocol.filter, signals.rateHz));
  add(
    "past_reflex_limit",
    isPastReflexLimit(place.windowMs[1], protocol.filter, protocol.reflex_limit_ms),
  );
  add("near_edge", isNearEdge(span, prepared.segments, protocol.filter, signals.rateHz));
  add("slip", (fit.slipPct ?? 0) > SLIP_LIMIT_PCT);
  add("angle_noise", (fit.angleNoisePct ?? 0) > ANGLE_NOISE_LIMIT_PCT);
  add("filled_samples", isFilled(recorded, span));
  add(
    "clipped_channel",
    isClipped(recorded, prepared.onsetVelocityRadPerS, movement.peakVelocityRadPerS, span),
  );
  return codes;
}

function emgOf(bench: Bench, place: Place): ResultEmg[] {
  const { signals, levels, protocol } = bench;
  const { onset, nextOnset, windowMs } = place;
  const { start, end } = windowSpan(onset, windowMs, protocol.baseline_ms, signals.rateHz);
  return signals.emg.map(({ muscle, unit }, i) => {
    const level = levels[i] as Float64Array;
    const quiet = quietOf(level, onset, signals.rateHz);
    const timing = emgTiming(level, quiet, onset, nextOnset, [start, end], signals.rateHz);
    const { baseline, burst, latencyMs } = timing;
    return { muscle, unit, baseline, burst, latency_ms: latencyMs };
  });
}

/** The level of each muscle before a window's onset. */
export function emgBaselines({ signals, levels }: Bench, { onset }: Place): (number | null)[] {
  return levels.map((level) => quietOf(level, onset, signals.rateHz)?.mean ?? null);
}

function quietOf(level: Float64Array, onset: number, rateHz: number): QuietLevel | null {
  const known = remembered(quietLevels, level, () => new Map<number, QuietLevel | null>());
  const before = known.get(onset);
  if (before !== undefined) return before;
  const quiet = quietLevel(level, onset, rateHz);
  known.set(onset, quiet);
  return quiet;
}

/**
 * Flags windows whose EMG was up before the onset, against the median of those that are included.
 *
 * @param kept  levels of each muscle before the included windows
 */
export function markRaised(
  windows: readonly ResultWindow[],
  kept: readonly (readonly (number | null)[])[],
): void {
  const muscles = windows[0]?.emg.length ?? 0;
  const limits = Array.from({ length: muscles }, (_, m) =>
    raisedLimit(kept.flatMap((levels) => levels[m] ?? [])),
  );
  for (const window of windows) {
    const raised = window.emg.some(
      ({ baseline }, m) => baseline !== null && baseline > (limits[m] as number),
    );
    if (raised) window.flags.push(flag("raised_emg"));
  }
}

/** Those of an axis' windows that are fitted: asked for at every drag, so each answer is remembered. */
export function keptAmong(bench: Bench, places: readonly Place[]): Place[] {
  const { protocol, prepared } = bench;
  const known = remembered(keptWindows, prepared, () => new Map<string, boolean>());
  const settings = JSON.stringify([protocol.baseline_ms, protocol.model, bench.expected]);
  return places.filter((place) => {
    const { onset, nextOnset, windowMs, included } = place;
    const key = `${onset} ${nextOnset} ${windowMs[0]} ${windowMs[1]} ${included} ${settings}`;
    let kept = known.get(key);
    if (kept === undefined) {
      kept = examine(bench, place).fit !== null;
      known.set(key, kept);
    }
    return kept;
  });
}

/** What a screen draws of a fitted window. */
export function traceOf({ signals }: Bench, examined: Examined): WindowView["trace"] {
  if (examined.fit === null) return null;
  const { span } = examined;
  const { columns, fit, baseline } = examined.fit;
  const n = columns.torqueNm.length;
  const ofTerm = (term: Term) => {
    const value = fit.parameters[term] ?? 0;
    const column = columnOf(columns, term);
    const torque = new Float64Array(n);
    for (let i = 0; i < n; i++) torque[i] = value * (column[i] as number);
    return torque;
  };
  const timeMs = new Float64Array(n);
  for (let i = 0; i < n; i++) {
    timeMs[i] = ((span.start - span.onset + i) * 1000) / signals.rateHz;
  }
  return {
    timeMs,
    measuredNm: columns.torqueNm,
    modelledNm: fit.modelledNm,
    residualNm: fit.residualNm,
    termsNm: { K: ofTerm("K"), B: ofTerm("B"), I: ofTerm("I") },
    baseline: { angleRad: baseline.angleRad, torqueNm: baseline.torqueNm },
    share: sharesOf(columns, fit.parameters),
  };
}

/** Each code once, in the table's order. */
export function flagsOf(codes: readonly FlagCode[]): Flag[] {
  const order = Object.keys(FLAGS);
  return [...new Set(codes)]
    .sort((a, b) => order.indexOf(a) - order.indexOf(b))
    .map((code) => flag(code));
}
