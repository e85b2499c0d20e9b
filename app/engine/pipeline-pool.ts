import type { FlagCode } from "#app/engine/errors.ts";
import { ANGLE_NOISE_LIMIT_PCT } from "#app/engine/fit/angle-noise.ts";
import type { Baseline } from "#app/engine/fit/cut-window.ts";
import { baselineOf, cutColumns, lastWithValue } from "#app/engine/fit/cut-window.ts";
import { fitFlags, modelFlags } from "#app/engine/fit/fit-flags.ts";
import {
  columnOf,
  fitModel,
  impedanceModel,
  modelledTorque,
  SAMPLES_PER_TERM,
  withoutFixed,
} from "#app/engine/fit/fit-model.ts";
import { lagProfile } from "#app/engine/fit/lag-profile.ts";
import { qualityOf } from "#app/engine/fit/quality.ts";
import { sharesOf } from "#app/engine/fit/share.ts";
import { lag1Autocorrelation } from "#app/engine/math/moments.ts";
import { normalEquations } from "#app/engine/math/normal-equations.ts";
import type { Bench, Examined, Place, RecordingInput } from "#app/engine/pipeline-window.ts";
import { flagsOf } from "#app/engine/pipeline-window.ts";
import { correlationMatrix } from "#app/engine/pool/correlation.ts";
import { lagEstimateMs } from "#app/engine/pool/lag.ts";
import { lateTorque } from "#app/engine/pool/late.ts";
import { poolTerms } from "#app/engine/pool/pool-windows.ts";
import { isPulledByNoise, replicateFlags } from "#app/engine/pool/pooled-flags.ts";
import type { PlacedColumns } from "#app/engine/pool/stack.ts";
import { meanTrace, stackColumns } from "#app/engine/pool/stack.ts";
import { prepareAxis } from "#app/engine/prepare/prepare-axis.ts";
import type {
  AxisSignals,
  FittedModel,
  Impedance,
  ImpedanceModel,
  Protocol,
  ResultPooled,
  ResultWindow,
  WindowColumns,
  WindowSpan,
} from "#app/engine/types.ts";
import { exclusionOf } from "#app/engine/windows/exclusion.ts";
import { windowSpan } from "#app/engine/windows/window-span.ts";

/** The fitted model is carried on so far to see late torque. */
const LATE_REACH_MS = 400;
/** Rates that differ by less are one rate: samples can be averaged by their index. */
const SAME_RATE = 1e-3;

/** A window with what pooling needs of it; the recording's columns themselves are let go. */
export interface Analysed {
  window: ResultWindow;
  place: Place;
  rateHz: number;
  /** null where it is not fitted. */
  pooling: Pooling | null;
}

interface Pooling {
  fit: FittedModel;
  placed: PlacedColumns;
  angleNoisePct: number | null;
  lagProfile: Float64Array | null;
  /** From after the protocol's window to 400 ms, the next onset or the stretch's end; null where it is not asked for. */
  tail: PlacedColumns | null;
}

/** What is pooled together, and by which protocol. */
interface Group {
  protocol: Protocol;
  model: ImpedanceModel;
  direction: string;
  /** Included windows in the order of recordings and time. */
  windows: readonly (Analysed & { pooling: Pooling })[];
}

/** What a window keeps for the pooled values; null where it is not fitted. */
export function poolingOf(bench: Bench, examined: Examined): Pooling | null {
  const { prepared, signals, model } = bench;
  const { span, place, fit: fitted } = examined;
  if (fitted === null) return null;
  return {
    fit: fitted.fit,
    placed: { first: span.start - span.onset, columns: fitted.columns },
    angleNoisePct: fitted.angleNoisePct,
    lagProfile: lagProfile(prepared.torqueNm, span, fitted.columns, model, signals.rateHz),
    tail: tailOf(bench, span, fitted.baseline, place.nextOnset),
  };
}

/** All pooled entries, by axis, then direction, in code-unit order. */
export function poolAll(
  protocol: Protocol,
  recordings: readonly RecordingInput[],
  rigs: readonly { rig: Impedance; measured: boolean }[],
  analysed: readonly Analysed[],
): ResultPooled[] {
  const model = impedanceModel(protocol.model);
  const pooled = protocol.axes.flatMap(({ name, positive, negative }, axis) => {
    const { rig, measured } = rigs[axis] as { rig: Impedance; measured: boolean };
    const groups = [positive, negative].flatMap((direction): Group[] => {
      const all = analysed.filter(
        ({ window }) => window.axis === name && window.direction === direction,
      );
      const windows = all.flatMap((each) =>
        each.pooling === null ? [] : [{ ...each, pooling: each.pooling }],
      );
      return all.length === 0 ? [] : [{ protocol, model, direction, windows }];
    });
    const surfaces = robustnessOf({ protocol, model, axis, rig, recordings }, groups);
    return groups.map((group, g) => {
      const { entry, codes } = poolGroup(group, name);
      if (!measured && rig.K === 0 && rig.B === 0 && rig.I === 0) codes.push("rig_not_removed");
      const robustness = group.windows.length === 0 ? null : (surfaces?.[g] ?? null);
      return { ...entry, robustness, flags: flagsOf(codes) };
    });
  });
  return pooled.sort(
    (a, b) => codeUnitOrder(a.axis, b.axis) || codeUnitOrder(a.direction, b.direction),
  );
}

function poolGroup(
  group: Group,
  axis: string,
): { entry: Omit<ResultPooled, "flags" | "robustness">; codes: FlagCode[] } {
  const { protocol, model, windows } = group;
  const fits = windows.map(({ pooling }) => pooling.fit);
  const stack = stackColumns(windows.map(({ pooling }) => pooling.placed.columns));
  const fitted = windows.length === 0 ? null : fitModel(stack, model);
  const stacked = fitted?.status === "fitted" ? fitted : null;
  const quality = stacked && qualityOf(stack.torqueNm, stacked.residualNm);
  const equations = windows.map(({ pooling: { placed } }) =>
    normalEquations(
      model.free.map((term) => columnOf(placed.columns, term)),
      withoutFixed(placed.columns, model),
    ),
  );
  const { terms, spreads } = poolTerms(stacked, fits, equations, model, protocol.uncertainty);
  const rateHz = commonRate(windows);
  const orderLag1 = model.free.includes("K")
    ? lag1Autocorrelation(fits.map((fit) => fit.parameters.K as number))
    : null;
  const entry = {
    axis,
    direction: group.direction,
    windows: windows.length,
    ...terms,
    vaf_pct: quality?.vaf_pct ?? null,
    vaf_uncentred_pct: quality?.vaf_uncentred_pct ?? null,
    lag_estimate_ms:
      rateHz === null
        ? null
        : lagEstimateMs(
            windows.flatMap(({ pooling }) => pooling.lagProfile ?? []),
            rateHz,
          ),
    order_lag1: orderLag1,
    late:
      stacked && rateHz !== null && asksForLate(protocol)
        ? lateOf(group, stacked, quality?.rms_residual ?? null, rateHz)
        : null,
    ensemble: ensembleOf(group, rateHz),
    correlation: stacked && correlationMatrix(stacked.covarianceUnscaled, stacked.covarianceTerms),
    share: stacked ? sharesOf(stack, stacked.parameters) : { K: null, B: null, I: null },
  };
  const noise = windows.flatMap(({ pooling }) => pooling.angleNoisePct ?? []);
  const codes = stacked ? fitFlags(stacked, model, quality?.vaf_pct ?? null) : modelFlags(model);
  codes.push(...replicateFlags(windows.length, orderLag1));
  if (isPulledByNoise(noise, spreads.I, ANGLE_NOISE_LIMIT_PCT)) codes.push("angle_noise");
  for (const code of ["coarse_sampling", "past_reflex_limit"] as const) {
    if (windows.some(({ window }) => window.flags.some((each) => each.code === code))) {
      codes.push(code);
    }
  }
  return { entry, codes };
}

/** One fit on the mean trace; none where the recordings' rates differ. */
function ensembleOf({ model, windows }: Group, rateHz: number | null): ResultPooled["ensemble"] {
  const trace = rateHz === null ? null : meanTrace(windows.map(({ pooling }) => pooling.placed));
  const fit = trace && fitModel(trace.columns, model);
  if (trace === null || fit?.status !== "fitted")
    return { K: null, B: null, I: null, vaf_pct: null };
  return {
    ...fit.parameters,
    vaf_pct: qualityOf(trace.columns.torqueNm, fit.residualNm).vaf_pct,
  };
}

// ---------------------------------------------------------------- late torque

function asksForLate({ window_ms, reflex_limit_ms }: Protocol): boolean {
  return window_ms[1] < reflex_limit_ms;
}

function tailOf(
  { prepared, signals, protocol, rig }: Bench,
  span: WindowSpan,
  baseline: Baseline,
  nextOnset: number | null,
): PlacedColumns | null {
  if (!asksForLate(protocol)) return null;
  const at = (ms: number) => span.onset + Math.round((ms * signals.rateHz) / 1000);
  const from = at(protocol.window_ms[1]) + 1;
  const reach = Math.min(at(LATE_REACH_MS), (nextOnset ?? Number.POSITIVE_INFINITY) - 1);
  const to = Math.min(reach, lastWithValue(prepared, span.end, reach));
  return { first: from - span.onset, columns: cutColumns(prepared, baseline, from, to, rig) };
}

function lateOf(
  { windows }: Group,
  stacked: FittedModel,
  rmsResidual: number | null,
  rateHz: number,
): ResultPooled["late"] {
  const trace = meanTrace(windows.flatMap(({ pooling }) => pooling.tail ?? []));
  const modelled = trace && modelledTorque(trace.columns, stacked.parameters);
  return lateTorque(trace, modelled, rmsResidual, rateHz);
}

// ---------------------------------------------------------------- robustness of the choices

/** Where the windows of one axis were cut from. */
interface Source {
  protocol: Protocol;
  model: ImpedanceModel;
  axis: number;
  rig: Impedance;
  recordings: readonly RecordingInput[];
}

/**
 * For each group the stacked estimate for other window ends and cut-offs, with the onsets and
 * exclusions of the main fit; null where a window's span would be excluded or the cut-off does not
 * suit the rate.
 */
function robustnessOf(
  source: Source,
  groups: readonly Group[],
): NonNullable<ResultPooled["robustness"]>[] | null {
  const { robustness, filter } = source.protocol;
  if (robustness === undefined) return null;
  const own = filter === null ? null : filter.cutoff_hz;
  const tried: (number | null)[] =
    own === null || robustness.cutoff_hz.length === 0 ? [own] : robustness.cutoff_hz;
  const estimates = tried.map((cutoffHz) =>
    estimatesAt(source, groups, cutoffHz, robustness.window_end_ms),
  );
  return groups.map((_, g) =>
    robustness.window_end_ms.flatMap((windowEndMs, end) =>
      tried.map((cutoffHz, cutoff) => ({
        window_end_ms: windowEndMs,
        cutoff_hz: cutoffHz,
        ...(estimates[cutoff]?.[g]?.[end] ?? { K: null, B: null, I: null }),
      })),
    ),
  );
}

/** Of each group one estimate for each window end, at one cut-off. */
function estimatesAt(
  { protocol, model, axis, rig, recordings }: Source,
  groups: readonly Group[],
  cutoffHz: number | null,
  windowEndsMs: readonly number[],
): (FittedModel["parameters"] | null)[][] {
  const filter =
    protocol.filter && cutoffHz !== null ? { ...protocol.filter, cutoff_hz: cutoffHz } : null;
  const stacks = groups.map(() => windowEndsMs.map((): WindowColumns[] | null => []));
  for (const [index, { signals }] of recordings.entries()) {
    const isHere = ({ window }: Analysed) => window.recording === index;
    if (!groups.some(({ windows }) => windows.some(isHere))) continue;
    const recorded = signals.axes[axis] as AxisSignals;
    const suits = cutoffHz === null || cutoffHz < signals.rateHz / 2;
    const prepared = suits ? prepareAxis(signals, recorded, { ...protocol, filter }, "fit") : null;
    const cut = (place: Place, endMs: number): WindowColumns | null => {
      const startMs = place.windowMs[0];
      if (prepared === null || endMs <= startMs) return null;
      const { rateHz } = signals;
      const span = windowSpan(place.onset, [startMs, endMs], protocol.baseline_ms, rateHz);
      if (span.end - span.start + 1 < SAMPLES_PER_TERM * model.free.length) return null;
      const { nextOnset, byHand } = place;
      const state = { nextOnset, byHand, underWay: false, otherMovement: false };
      const baseline = baselineOf(prepared, span);
      const excluded = exclusionOf({ signals, recorded, prepared, span, ...state });
      if (excluded !== null || baseline === null) return null;
      return cutColumns(prepared, baseline, span.start, span.end, rig);
    };
    groups.forEach(({ windows }, g) => {
      for (const { place } of windows.filter(isHere)) {
        windowEndsMs.forEach((endMs, e) => {
          const ofGroup = stacks[g] as (WindowColumns[] | null)[];
          const columns = ofGroup[e] && cut(place, endMs);
          if (columns) ofGroup[e]?.push(columns);
          else ofGroup[e] = null;
        });
      }
    });
  }
  return stacks.map((ofGroup) =>
    ofGroup.map((stack) => {
      const fit = stack && fitModel(stackColumns(stack), model);
      return fit?.status === "fitted" ? fit.parameters : null;
    }),
  );
}

// ---------------------------------------------------------------- small matters

/** The rate that the windows share; null where they do not (or there are none). */
function commonRate(windows: readonly Analysed[]): number | null {
  const first = windows[0]?.rateHz;
  if (first === undefined) return null;
  return windows.every(({ rateHz }) => Math.abs(rateHz - first) <= SAME_RATE * first)
    ? first
    : null;
}

function codeUnitOrder(a: string, b: string): number {
  if (a === b) return 0;
  return a < b ? -1 : 1;
}
