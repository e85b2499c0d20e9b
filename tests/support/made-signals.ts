import { minimumJerk } from "#app/engine/math/minimum-jerk.ts";
import type {
  AxisProtocol,
  AxisSignals,
  ChannelProtocol,
  ChannelSignal,
  Segment,
  Signals,
  TransientProtocol,
  Unit,
} from "#app/engine/types.ts";

/** Signals made from closed forms, and the protocol for them: no file between a test and the engine. */

export const RAD_PER_DEG = Math.PI / 180;

export interface State {
  /** rad, rad/s, rad/s² */
  theta: number;
  omega: number;
  alpha: number;
}

/** One minimum-jerk ramp: from `atS` on, by `amplitudeDeg`, within `durationMs`. */
export interface Ramp {
  atS: number;
  amplitudeDeg: number;
  durationMs: number;
}

/** Sum of ramps at a time. */
export function rampsAt(ramps: readonly Ramp[], timeS: number): State {
  const state = { theta: 0, omega: 0, alpha: 0 };
  for (const { atS, amplitudeDeg, durationMs } of ramps) {
    const { position, velocity, acceleration } = minimumJerk(
      amplitudeDeg * RAD_PER_DEG,
      durationMs / 1000,
      timeS - atS,
    );
    state.theta += position;
    state.omega += velocity;
    state.alpha += acceleration;
  }
  return state;
}

export interface MadeAxis {
  name?: string;
  /** Angle's state at a time, s. */
  move: (timeS: number) => State;
  /** Torque at a time, N·m. */
  torque: (timeS: number) => number;
  limbAngle?: (timeS: number) => number;
}

/** A second-order joint: T = K θ + B ω + I α + offset. */
export function joint(
  move: (timeS: number) => State,
  { K, B, I }: { K: number; B: number; I: number },
  offset = 0,
): (timeS: number) => number {
  return (timeS) => {
    const { theta, omega, alpha } = move(timeS);
    return K * theta + B * omega + I * alpha + offset;
  };
}

export interface MadeRecording {
  rateHz: number;
  durationS: number;
  startS?: number;
  axes: MadeAxis[];
  trigger?: (timeS: number) => number;
  emg?: { muscle: string; volts: (timeS: number, sample: number) => number }[];
  /** Samples before which so many seconds are missing. */
  gapBefore?: { sample: number; seconds: number }[];
  /** Samples whose stamp repeats the one before. */
  duplicateBefore?: number[];
  /** Samples without a value on the first axis' angle. */
  missing?: number[];
}

/** Signals as the reader hands them on. */
export function makeSignals(made: MadeRecording): Signals {
  const { rateHz, startS = 0, gapBefore = [], duplicateBefore = [], missing = [] } = made;
  const samples = Math.round(made.durationS * rateHz);
  const timeS = new Float64Array(samples);
  let behind = 0;
  let lost = 0;
  for (let i = 0; i < samples; i++) {
    if (duplicateBefore.includes(i)) behind++;
    lost += gapBefore.find(({ sample }) => sample === i)?.seconds ?? 0;
    timeS[i] = startS + (i - behind) / rateHz + lost;
  }
  const breaks = [...gapBefore.map(({ sample }) => sample), ...duplicateBefore].sort(
    (a, b) => a - b,
  );
  const segments: Segment[] = [];
  let start = 0;
  for (const end of [...breaks, samples]) {
    segments.push({ start, end });
    start = end;
  }
  const axes = made.axes.map((axis, a): AxisSignals => {
    const angle = channel(
      "angle",
      timeS.map((t) => axis.move(t).theta),
    );
    if (a === 0) for (const i of missing) angle.si[i] = Number.NaN;
    const torqueNm = timeS.map((t) => axis.torque(t));
    const { limbAngle } = axis;
    return {
      name: axis.name ?? `A${a}`,
      angle,
      limbAngle: limbAngle
        ? channel(
            "limb",
            timeS.map((t) => limbAngle(t)),
          )
        : null,
      torqueNm,
      torqueChannels: [channel("torque", torqueNm)],
    };
  });
  return {
    samples,
    rateHz,
    durationS: (timeS[samples - 1] as number) - startS,
    timeS,
    segments,
    gapBefore: gapBefore.map(({ sample }) => sample),
    duplicateBefore,
    gaps: gapBefore.length,
    duplicates: duplicateBefore.length,
    missing: missing.length,
    axes,
    trigger: made.trigger ? timeS.map(made.trigger) : null,
    emg: (made.emg ?? []).map(({ muscle, volts }) => ({
      muscle,
      unit: "V" as const,
      channel: channel(
        muscle,
        timeS.map((t, i) => volts(t, i)),
      ),
    })),
    flags: [],
    dialect: {
      encoding: "utf-8",
      separator: ",",
      decimal: ".",
      headerLine: 1,
      unitsLine: null,
    },
  };
}

/** A channel that is clipped where 5 samples in a row stand at its extreme. */
export function channel(column: string, si: Float64Array): ChannelSignal {
  const values = si.filter((value) => !Number.isNaN(value));
  const rawMin = values.reduce((least, value) => Math.min(least, value), Number.POSITIVE_INFINITY);
  const rawMax = values.reduce((most, value) => Math.max(most, value), Number.NEGATIVE_INFINITY);
  const clippedRun = new Uint8Array(si.length);
  for (const extreme of [rawMin, rawMax]) {
    let from = 0;
    for (let i = 0; i <= si.length; i++) {
      if (i < si.length && si[i] === extreme) continue;
      if (i - from >= 5) clippedRun.fill(1, from, i);
      from = i + 1;
    }
  }
  return { column, si, rawMin, rawMax, clippedRun, filled: null, constant: rawMin === rawMax };
}

export interface ProtocolChanges extends Partial<Omit<TransientProtocol, "onset">> {
  onset?: Partial<TransientProtocol["onset"]>;
}

/** A protocol with every default, one axis "A0" unless `axes` are given. */
export function makeProtocol({ onset, ...changes }: ProtocolChanges = {}): TransientProtocol {
  return {
    version: 1,
    kind: "transient",
    table: { separator: "auto", decimal: "auto", header_row: "auto" },
    time: { column: "t", unit: "s" },
    axes: [makeAxis("A0")],
    emg: [],
    filter: { family: "butterworth", order: 2, cutoff_hz: 20 },
    derivative: "central",
    onset: {
      from: "angle",
      trigger_column: null,
      cutoff_hz: 50,
      min_separation_ms: 500,
      expected_amplitude_deg: null,
      expected_duration_ms: null,
      ...onset,
    },
    reflex_limit_ms: 50,
    background: { target: null, tolerance: null },
    baseline_ms: [-50, 0],
    window_ms: [0, 100],
    model: { terms: ["K", "B", "I"], fixed: {}, nonnegative: false },
    rig: { K: 0, B: 0, I: 0 },
    lag_ms: 0,
    max_filled_samples: 0,
    uncertainty: { level: 0.95, resamples: 2000, seed: 1 },
    ...changes,
  };
}

export function makeAxis(name: string, changes: Partial<AxisProtocol> = {}): AxisProtocol {
  return {
    name,
    positive: "up",
    negative: "down",
    angle: channelOf(`ang_${name}`, "rad"),
    torque: channelOf(`trq_${name}`, "N.m"),
    ...changes,
  };
}

function channelOf(column: string, unit: Unit): ChannelProtocol {
  return { column, unit, gain: 1, offset: 0, sign: 1 };
}
