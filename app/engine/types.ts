/**
 * The shapes that the stages hand to each other. SI units everywhere; degrees only where a key
 * ends in `_deg`. Keys with underscores are those of the headless documents (PROTOCOL, WINDOWS,
 * RESULT); names in camel case stay inside the program.
 */

// ---------------------------------------------------------------- units

export const UNITS = [
  "deg",
  "rad",
  "mrad",
  "N.m",
  "N.mm",
  "N.cm",
  "kN.m",
  "s",
  "ms",
  "us",
  "V",
  "mV",
  "uV",
  "N",
  "kN",
  "m",
  "cm",
  "mm",
  "Pa",
  "kPa",
  "bar",
  "1",
] as const;
export type Unit = (typeof UNITS)[number];

// ---------------------------------------------------------------- protocol, as in PROTOCOL.json with defaults filled in

/** value = sign · (raw − offset) · gain, then unit → SI. */
export interface ChannelProtocol {
  column: string;
  unit: Unit;
  gain: number;
  offset: number;
  sign: 1 | -1;
}

export interface ForcePlateProtocol {
  force: [string, string, string];
  moment: [string, string, string];
  force_unit: Unit;
  moment_unit: Unit;
  /** r, from the joint centre to the plate's origin, m. */
  joint_to_plate_m: [number, number, number];
  about: "x" | "y" | "z";
}

export interface AxisProtocol {
  name: string;
  positive: string;
  negative: string;
  angle: ChannelProtocol;
  /** Exactly one of `torque` and `torque_from` is there. */
  torque?: ChannelProtocol;
  torque_from?: { force_plate: ForcePlateProtocol };
  limb_angle?: ChannelProtocol;
  fit_angle?: "rig" | "limb";
}

export interface EmgProtocol {
  muscle: string;
  column: string;
  unit: Unit;
  /** Level in V that is 1. */
  reference?: number;
}

export type Term = "K" | "B" | "I";
export const TERMS: readonly Term[] = ["K", "B", "I"];

/** Stiffness N·m/rad, damping N·m·s/rad, inertia kg·m². */
export interface Impedance {
  K: number;
  B: number;
  I: number;
}

export interface FilterProtocol {
  family: "butterworth";
  /** Of one pass; two are made. */
  order: number;
  /** −3 dB point of one pass. */
  cutoff_hz: number;
}

export type DerivativeProtocol =
  | "central"
  | { savitzky_golay: { polynomial: number; span_ms: number } };

export interface TableProtocol {
  separator: "auto" | "," | ";" | "\t" | "|" | " ";
  decimal: "auto" | "." | ",";
  header_row: "auto" | number;
}

export type TimeProtocol = { column: string; unit: Unit } | { rate_hz: number };

export interface TransientProtocol {
  version: 1;
  kind: "transient";
  table: TableProtocol;
  time: TimeProtocol;
  axes: AxisProtocol[];
  emg: EmgProtocol[];
  filter: FilterProtocol | null;
  derivative: DerivativeProtocol;
  onset: {
    from: "angle" | "trigger";
    trigger_column: string | null;
    cutoff_hz: number;
    min_separation_ms: number;
    expected_amplitude_deg: number | null;
    expected_duration_ms: number | null;
  };
  reflex_limit_ms: number;
  background: { target: number | null; tolerance: number | null };
  baseline_ms: [number, number];
  window_ms: [number, number];
  model: { terms: Term[]; fixed: Partial<Impedance>; nonnegative: boolean };
  /** One for all axes, or one for each axis by its name. */
  rig: Impedance | Record<string, Impedance>;
  lag_ms: number;
  max_filled_samples: number;
  robustness?: { window_end_ms: number[]; cutoff_hz: number[] };
  uncertainty: { level: number; resamples: number; seed: number };
}

/** Later kinds (continuous, sweep, bench) join this union. */
export type Protocol = TransientProtocol;

// ---------------------------------------------------------------- windows document

export interface WindowEntry {
  recording_sha256: string;
  axis: string;
  onset_s: number;
  window_ms: [number, number];
  included: boolean;
  /** A code of the engine's or any sentence of a person's. */
  reason: string | null;
}

export interface WindowsDocument {
  version: 1;
  windows: WindowEntry[];
}

// ---------------------------------------------------------------- table (parse)

export interface Dialect {
  encoding: "utf-8" | "utf-16le" | "utf-16be" | "windows-1252";
  separator: "," | ";" | "\t" | "|" | " ";
  decimal: "." | ",";
  /** Physical line of the names, from 1. */
  headerLine: number;
  /** Physical line of the units row, or null. */
  unitsLine: number | null;
}

/** What the first part of a file looks like: for the person who maps its columns. */
export interface TablePreview {
  dialect: Dialect;
  /** All column names, trimmed, in file order. */
  header: string[];
  /** Units as written below the names or in brackets behind a name; "" where none. */
  units: string[];
  /** The first data rows as text, each as long as `header`. */
  rows: string[][];
  /** Preamble lines before the header, as text. */
  preamble: string[];
  flags: Flag[];
}

export interface Table {
  dialect: Dialect;
  header: string[];
  units: string[];
  /** Number of data rows. */
  rows: number;
  /** The mapped columns only, each `rows` long; a missing cell is NaN. Raw values, unscaled. */
  columns: Map<string, Float64Array>;
  /** Physical line (from 1) of the first data row. */
  firstDataLine: number;
  /**
   * Physical lines after `firstDataLine` that hold no row (blank lines, continued quoted cells),
   * ascending: with them the line of each row is known without an array as long as the file.
   */
  skippedLines: number[];
  flags: Flag[];
}

// ---------------------------------------------------------------- signals (channels)

/** Half-open range of samples [start, end) with regular steps. */
export interface Segment {
  start: number;
  end: number;
}

/** One recorded quantity in SI units; NaN where a cell is missing. */
export interface ChannelSignal {
  column: string;
  si: Float64Array;
  /** Raw extremes of the column as recorded, before calibration; for clipping. */
  rawMin: number;
  rawMax: number;
  /** 1 where the raw sample sits in a run of ≥ 5 consecutive samples at rawMin or rawMax. */
  clippedRun: Uint8Array;
  /** 1 where a missing sample was filled linearly (protocol's max_filled_samples). */
  filled: Uint8Array | null;
  /** One value throughout. */
  constant: boolean;
}

export interface AxisSignals {
  name: string;
  /** The rig's angle, rad. */
  angle: ChannelSignal;
  /** The limb's own angle, rad, where a second angle channel is mapped. */
  limbAngle: ChannelSignal | null;
  /** Torque about the joint, N·m (for a force plate: M + r × F about the axis), lag not yet applied. */
  torqueNm: Float64Array;
  /** The channels that the torque comes from (one, or six of a force plate). */
  torqueChannels: ChannelSignal[];
}

export interface Signals {
  samples: number;
  rateHz: number;
  durationS: number;
  /** Stamp of each sample in the file's own time, s (first sample 0 with a stated rate). NaN where missing. */
  timeS: Float64Array;
  /** Gap-free stretches by time alone: broken at gaps, duplicates and missing stamps. */
  segments: Segment[];
  /** Sample indices i where the step from i − 1 to i is a gap, or 0. */
  gapBefore: number[];
  duplicateBefore: number[];
  gaps: number;
  duplicates: number;
  /** Missing cells over the mapped columns. */
  missing: number;
  axes: AxisSignals[];
  trigger: Float64Array | null;
  emg: { muscle: string; unit: "V" | "1"; channel: ChannelSignal }[];
  flags: Flag[];
  dialect: Dialect;
}

// ---------------------------------------------------------------- results

export interface Flag {
  code: string;
  /** One plain sentence. */
  text: string;
}

export interface ResultRecording {
  file: string;
  sha256: string;
  samples: number;
  rate_hz: number;
  duration_s: number;
  gaps: number;
  duplicates: number;
  missing: number;
  flags: Flag[];
}

export interface ResultEmg {
  muscle: string;
  unit: "V" | "1";
  baseline: number | null;
  burst: boolean;
  latency_ms: number | null;
}

export interface ResultWindow {
  /** Index of the recording in the document's `recordings`. */
  recording: number;
  axis: string;
  direction: string | null;
  onset_s: number;
  window_ms: [number, number];
  amplitude_deg: number | null;
  duration_ms: number | null;
  background_torque: number | null;
  included: boolean;
  reason: string | null;
  K: number | null;
  B: number | null;
  I: number | null;
  vaf_pct: number | null;
  vaf_uncentred_pct: number | null;
  rms_residual: number | null;
  condition_number: number | null;
  lag1: number | null;
  slip_pct: number | null;
  emg: ResultEmg[];
  flags: Flag[];
}

export type Interval = [number, number];

export interface PooledTerm {
  estimate: number | null;
  window_mean: number | null;
  window_sd: number | null;
  t: Interval | null;
  bootstrap: Interval | null;
}

export interface ResultPooled {
  axis: string;
  direction: string;
  windows: number;
  K: PooledTerm;
  B: PooledTerm;
  I: PooledTerm;
  vaf_pct: number | null;
  vaf_uncentred_pct: number | null;
  lag_estimate_ms: number | null;
  order_lag1: number | null;
  robustness:
    | {
        window_end_ms: number;
        cutoff_hz: number | null;
        K: number | null;
        B: number | null;
        I: number | null;
      }[]
    | null;
  late: {
    latency_ms: number | null;
    peak: number | null;
    peak_ms: number | null;
    impulse: number | null;
    apparent_stiffness: number | null;
  } | null;
  ensemble: { K: number | null; B: number | null; I: number | null; vaf_pct: number | null };
  /** 3 × 3, rows and columns K, B, I. */
  correlation: number[][] | null;
  share: { K: number | null; B: number | null; I: number | null };
  flags: Flag[];
}

export interface ResultRig extends Impedance {
  K_sd: number | null;
  B_sd: number | null;
  I_sd: number | null;
}

export interface Result {
  result_version: 1;
  /** Name and version of the engine. */
  engine: string;
  protocol_sha256: string;
  recordings: ResultRecording[];
  rig: Record<string, ResultRig>;
  windows: ResultWindow[];
  pooled: ResultPooled[];
}

// ---------------------------------------------------------------- between pipeline and screens

/** Filtered and differentiated columns of one axis; NaN where a sample has no value. */
export interface PreparedAxis {
  name: string;
  /** The angle that is fitted (rig's or limb's, as the protocol says), low-passed, rad. */
  angleRad: Float64Array;
  velocityRadPerS: Float64Array;
  accelerationRadPerS2: Float64Array;
  /** Low-passed torque, N·m, lag applied, rig not yet removed. */
  torqueNm: Float64Array;
  /** |ω| for finding onsets comes from this angle, filtered at the onset's cut-off, rad. */
  onsetAngleRad: Float64Array;
  onsetVelocityRadPerS: Float64Array;
  /** Rig minus limb angle, low-passed, rad; null without a second angle channel. */
  slipRad: Float64Array | null;
  /** The stretches of the onset's columns: time's segments broken at this axis' missing samples. */
  onsetSegments: Segment[];
  /** The stretches of what is fitted: the same, less what the torque's delay takes. */
  segments: Segment[];
}

export interface Prepared {
  signals: Signals;
  axes: PreparedAxis[];
}

/** A window as found or as a person left it; the input of a fit. */
export interface WindowChoice {
  axis: string;
  onset_s: number;
  window_ms: [number, number];
  included: boolean;
  reason: string | null;
}

/** One window's fit with the traces that a screen draws; arrays are new and may be transferred. */
export interface WindowView {
  window: ResultWindow;
  /** null where the window is not fitted (set aside, excluded, singular). */
  trace: {
    /** Time of each sample in the window after the onset, ms. */
    timeMs: Float64Array;
    /** Torque relative to the baseline, rig removed, N·m. */
    measuredNm: Float64Array;
    modelledNm: Float64Array;
    residualNm: Float64Array;
    termsNm: { K: Float64Array; B: Float64Array; I: Float64Array };
    /** Baseline means that were subtracted. */
    baseline: { angleRad: number; torqueNm: number };
    /** Each term's largest |torque| over the sum of the three; null where a term is absent. */
    share: { K: number | null; B: number | null; I: number | null };
  } | null;
}

// ---------------------------------------------------------------- between windows, fit and pool

/** Sample indices of one window in its recording; they may lie outside of it. */
export interface WindowSpan {
  onset: number;
  /** Half-open [baselineStart, baselineEnd). */
  baselineStart: number;
  baselineEnd: number;
  /** Closed [start, end]. */
  start: number;
  end: number;
  /** Closed span from the earlier of the two starts to the later end. */
  spanStart: number;
  spanEnd: number;
}

/** What stands in a protocol's `onset` for the movement that the rig should have made. */
export interface ExpectedMovement {
  amplitudeDeg: number;
  durationMs: number;
}

/** What the movement after an onset was; null where it cannot be measured. */
export interface Movement {
  /** Which way: 1 is the axis' positive direction. */
  sign: 1 | -1 | null;
  amplitudeDeg: number | null;
  durationMs: number | null;
  /** Largest |ω| of the movement, rad/s. */
  peakVelocityRadPerS: number | null;
}

/** Columns relative to a baseline, of equal length; the torque with the rig's own part removed. */
export interface WindowColumns {
  angleRad: Float64Array;
  velocityRadPerS: Float64Array;
  accelerationRadPerS2: Float64Array;
  torqueNm: Float64Array;
}

/** Which terms are fitted, which are given, and whether they are bounded at 0. */
export interface ImpedanceModel {
  /** Terms that are estimated, in the order K, B, I. */
  free: Term[];
  /** Values that are given; SI, limb only. */
  fixed: Partial<Impedance>;
  nonnegative: boolean;
}

/** One least-squares fit of the model to columns. */
export type ModelFit =
  | {
      status: "fitted";
      /** Fitted or given values; null where a term is not in the model. */
      parameters: Record<Term, number | null>;
      /** Free terms that are held at 0 by the bound. */
      bound: Term[];
      /** Of the free columns, each scaled to unit 2-norm. */
      conditionNumber: number;
      /** (XᵀX)⁻¹ of the free columns that are not held at 0, row-major, in the order of `covarianceTerms`. */
      covarianceUnscaled: Float64Array;
      covarianceTerms: Term[];
      modelledNm: Float64Array;
      residualNm: Float64Array;
    }
  | { status: "too_short" }
  | { status: "singular" };

export type FittedModel = Extract<ModelFit, { status: "fitted" }>;

// ---------------------------------------------------------------- between the worker and screens

/** What a recording is like once it is open in the worker. */
export interface OpenedRecording {
  samples: number;
  rateHz: number;
  /** First and last stamp in the file's own time, s. */
  startS: number;
  endS: number;
  flags: Flag[];
  /** Every window that is found, also those that are left out. */
  found: WindowChoice[];
  emg: { muscle: string; unit: "V" | "1" }[];
}

export interface StretchRequest {
  axis: string;
  fromS: number;
  toS: number;
  /** Of the screen: more than four samples for each are thinned to its extremes. */
  pixels: number;
}

/** Filtered columns of a range of time, as a screen draws them; NaN where a line breaks. */
export interface Stretch {
  axis: string;
  timeS: Float64Array;
  angleDeg: Float64Array;
  velocityDegPerS: Float64Array;
  /** Low-passed, as recorded: background and rig are in it. */
  torqueNm: Float64Array;
  /** As recorded, in the order of `OpenedRecording.emg`. */
  emg: Float64Array[];
}

export interface ViewRequest {
  choice: WindowChoice;
  /** All windows of the axis. */
  choices: readonly WindowChoice[];
  pixels: number;
}

export interface ViewAllRequest {
  choices: readonly WindowChoice[];
  pixels: number;
}

/** One window's fit as a screen draws it. */
export interface WindowDrawing {
  window: ResultWindow;
  /** Each term's largest |torque| over the sum of the three; null where a term is absent. */
  share: { K: number | null; B: number | null; I: number | null } | null;
  /** Null where the window is not fitted. */
  lines: {
    /** In the file's own time, s. */
    timeS: Float64Array;
    /** Relative to the baseline, degrees. */
    angleDeg: Float64Array;
    /** As recorded and as the model has it, background and rig in both, N·m. */
    measuredNm: Float64Array;
    modelledNm: Float64Array;
    residualNm: Float64Array;
    /** Each term's part of the modelled torque of the limb, N·m. */
    termsNm: { K: Float64Array; B: Float64Array; I: Float64Array };
  } | null;
}

// ---------------------------------------------------------------- a file that is not taken in yet

export interface ProposedChannel {
  column: string;
  /** As the file states it, or as the steps of time tell it; null where nothing does. */
  unit: Unit | null;
  /** Name and unit leave no doubt: else the person should look. */
  certain: boolean;
}

export interface ProposedTime extends ProposedChannel {
  unit: "s" | "ms" | "us" | null;
}

export interface ProposedEmg extends ProposedChannel {
  unit: "V" | "mV" | "uV" | null;
  muscle: string;
}

/** What names, units and first values of a file's columns suggest; null where nothing fits. */
export interface ProposedMap {
  time: ProposedTime | null;
  /** One entry for each of the study's axes, in their order. */
  axes: {
    name: string;
    angle: ProposedChannel | null;
    torque: ProposedChannel | null;
    limbAngle: ProposedChannel | null;
  }[];
  trigger: string | null;
  emg: ProposedEmg[];
}

/** A file's first part. */
export type FileHead =
  | { status: "read"; preview: TablePreview; proposed: ProposedMap }
  | { status: "refused"; sentence: string; line: number | null };

/** The first movement about an axis, in the signs of the protocol that it was read with. */
export type AxisMovement =
  | {
      axis: string;
      status: "moved";
      /** In the file's own time, s. */
      onsetS: number;
      /** Negative: towards the axis' negative direction. */
      amplitudeDeg: number;
      /** 1 where torque rises with the angle, −1 where it falls (K < 0), 0 where it tells neither. */
      torqueSign: 1 | -1 | 0;
    }
  | { axis: string; status: "still" };

/** A whole file, read with a map before it is taken in. */
export type FileReading =
  | {
      status: "read";
      facts: Pick<
        Signals,
        "samples" | "rateHz" | "durationS" | "gaps" | "duplicates" | "missing" | "flags"
      >;
      movements: AxisMovement[];
    }
  | { status: "refused"; sentence: string; line: number | null };
