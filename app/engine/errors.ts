/** Codes of what can be wrong with a file or, once the file is read, with a protocol for it. */
export type EngineErrorCode =
  | "unreadable" // the recording cannot be read as the protocol asks: exit 3 of the headless command
  | "protocol"; // the protocol asks for what this recording cannot give: exit 2

/**
 * What a file can do wrong. The code stands in `name`, since name, message and stack are all that
 * survives the way from a worker to the page: the sentence itself names the line to blame.
 */
export class EngineError extends Error {
  /** Physical line of the file, from 1, where one line is to blame. */
  readonly line: number | null;
  /** Dotted protocol field, where a field is to blame. */
  readonly field: string | null;

  constructor(code: EngineErrorCode, message: string, at: { line?: number; field?: string } = {}) {
    super(message);
    this.name = code;
    this.line = at.line ?? null;
    this.field = at.field ?? null;
  }
}

/** A text from a file as it may stand in a sentence: without line ends, at most 40 letters. */
export function oneLine(text: string): string {
  const line = text.replace(/[\p{Cc}\u2028\u2029]+/gu, " ");
  return line.length > 40 ? `${line.slice(0, 39)}…` : line;
}

export function quoted(text: string): string {
  return `"${oneLine(text)}"`;
}

interface Remark {
  /** One plain sentence. */
  text: string;
  /** One thing to do. */
  todo: string;
}

/**
 * Every flag: one code, one plain sentence, one thing to do. The headless command, the screens and
 * the method pages all read this table.
 */
export const FLAGS = {
  // ---- of a window or of pooled windows
  low_vaf: {
    text: "The model explains less than 90 % of the torque's variance in this window.",
    todo: "Look at the residual: a wrong trim, a reflex or slip between rig and limb is likely.",
  },
  non_physical_sign: {
    text: "A fitted term is negative, which no passive limb has.",
    todo: "Check the torque's sign and delay and the trim; the value stays as it was fitted.",
  },
  weakly_conditioned: {
    text: "The terms are hard to tell apart in this window (condition number over 30).",
    todo: "Lengthen the window or shorten the ramp, and read K, B and I together.",
  },
  ill_conditioned: {
    text: "The terms can hardly be told apart in this window (condition number over 100).",
    todo: "Lengthen the window or fix a term that is known; do not use the single values.",
  },
  coarse_sampling: {
    text: "Fewer than 20 samples lie in one period of the cut-off frequency.",
    todo: "Lower the cut-off or record at a higher rate.",
  },
  past_reflex_limit: {
    text: "The window, with the filter's reach, ends after reflex torque can begin.",
    todo: "End the window earlier or raise the cut-off; VAF cannot show a reflex.",
  },
  late_residual: {
    text: "The residual of the window's last quarter is more than twice that of the rest.",
    todo: "End the window earlier: reflex or voluntary torque is likely.",
  },
  emg_burst: {
    text: "A muscle becomes active inside the window.",
    todo: "End the window before the burst or set the window aside.",
  },
  raised_emg: {
    text: "Muscle activity before this perturbation is more than twice the median of the included windows.",
    todo: "Set the window aside if the participant was meant to be at rest.",
  },
  amplitude_off: {
    text: "The movement's amplitude is more than 20 % off the expected one.",
    todo: "Check the angle's unit and gain and the rig's command.",
  },
  duration_off: {
    text: "The movement's duration is more than 25 % off the expected one.",
    todo: "Check the rig's command and the expected duration.",
  },
  background_off: {
    text: "The background torque is further off its target than the tolerance.",
    todo: "Set the window aside or compare it only with windows of like background torque.",
  },
  clipped_channel: {
    text: "A channel stays at its extreme value for 5 samples or more while the joint moves.",
    todo: "Set the window aside and check the sensor's range.",
  },
  near_edge: {
    text: "The window lies so near the end of an unbroken stretch that the filter's ends reach into it.",
    todo: "Record longer before and after the perturbation, or raise the cut-off.",
  },
  slip: {
    text: "Limb and rig differ by more than 10 % of the movement.",
    todo: "Fasten the limb better, or fit the limb's own angle.",
  },
  angle_noise: {
    text: "Noise in the angle pulls the inertia towards zero by more than can be ignored.",
    todo: "Lower the cut-off or smooth the derivative more; B and K move too.",
  },
  windows_related: {
    text: "Stiffness follows the order of the windows, so the interval is too narrow.",
    todo: "Look for drift or fatigue over the recording, and leave more time between perturbations.",
  },
  rig_not_removed: {
    text: "The rig's own torque is not removed: the values are those of limb and rig together.",
    todo: "Add a recording of the empty rig, or state the rig's K, B and I.",
  },
  bound_active: {
    text: "A term would have been negative and is held at zero.",
    todo: "Fit once without the bound to see what pulls it there.",
  },
  fixed: {
    text: "This term was set beforehand and not fitted.",
    todo: "Name the source of the set value wherever the result is reported.",
  },
  term_absent: {
    text: "This term is not in the model.",
    todo: "Add it to the protocol's terms if the movement is fast enough to show it.",
  },
  too_few_windows: {
    text: "Too few windows are included for an interval.",
    todo: "Include or record more perturbations: an interval needs two, a useful one needs five.",
  },
  filled_samples: {
    text: "Missing samples in this window were filled by a straight line.",
    todo: "Check the filled stretch in the trace, or set the window aside.",
  },

  // ---- of continuous perturbations, sweeps and bench tests
  drive_unknown: {
    text: "Without the command sent to the actuator, a rig that gives way biases the result unseen.",
    todo: "Record the actuator's command and name its column as the axis's drive.",
  },
  too_few_lines: {
    text: "Fewer frequency lines than free terms are coherent enough, so nothing is fitted.",
    todo: "Record longer, move more, widen the band or shorten the segments.",
  },
  no_repeats: {
    text: "There is only one repeat, so there is no interval.",
    todo: "Record at least one more repeat.",
  },

  // ---- of a recording
  no_perturbation: {
    text: "No perturbation was found in this recording.",
    todo: "Check the angle's unit and the expected amplitude and duration.",
  },
  constant_channel: {
    text: "A channel holds one value throughout the recording.",
    todo: "Check that the right column is mapped and that the sensor was connected.",
  },
  jitter: {
    text: "Some time steps differ from the median step by more than 1 %.",
    todo: "Check the recorder's clock; the mean step is used.",
  },
  gaps: {
    text: "Samples are missing in time.",
    todo: "Windows that touch a gap are set aside; check the recorder's buffer.",
  },
  duplicates: {
    text: "Some time stamps repeat the one before.",
    todo: "Windows that touch one are set aside; write time with more digits or state the rate.",
  },
  unit_mismatch: {
    text: "The file states another unit than the protocol, whose unit is used.",
    todo: "Check which of the two is right: a wrong one scales K, B and I.",
  },
  encoding_guessed: {
    text: "The file does not say how its letters are coded and was read as Windows-1252.",
    todo: "Check names with special letters, or save the file as UTF-8.",
  },
  truncated: {
    text: "The last line of the file is cut off and was left out.",
    todo: "Check that the recording was copied whole.",
  },
} as const satisfies Record<string, Remark>;

export type FlagCode = keyof typeof FLAGS;

/**
 * The flag as it stands in a result.
 *
 * @param about  what the flag is about where the code alone does not say it, for example column names
 */
export function flag(code: FlagCode, about?: string): { code: string; text: string } {
  const text: string = FLAGS[code].text;
  return { code, text: about === undefined ? text : `${text.slice(0, -1)}: ${about}.` };
}

/** Why a window was not fitted: the engine's own reasons, in the order in which the first holds. */
export const REASONS = {
  start_of_recording: {
    text: "The window reaches over the start of the recording or of an unbroken stretch.",
    todo: "Leave it out, or shorten the baseline.",
  },
  end_of_recording: {
    text: "The window reaches over the end of the recording or of an unbroken stretch.",
    todo: "Leave it out, or shorten the window.",
  },
  missing_samples: {
    text: "Samples are missing in the window or its baseline.",
    todo: "Leave it out, or let the protocol fill short runs.",
  },
  duplicate: {
    text: "A time stamp in the window or its baseline repeats the one before.",
    todo: "Leave it out; write time with more digits or state the rate.",
  },
  gap: {
    text: "The window or its baseline lies across a gap in time.",
    todo: "Leave it out; check the recorder's buffer.",
  },
  other_movement: {
    text: "The movement lasts over twice or under half as long as expected.",
    todo: "Include it by hand only if it is a perturbation after all.",
  },
  overlap: {
    text: "The window reaches into the next perturbation.",
    todo: "Shorten the window, or include it by hand.",
  },
  too_short: {
    text: "The window has too few samples for the terms to be fitted.",
    todo: "Lengthen the window.",
  },
  singular: {
    text: "The terms cannot be told apart in this window at all.",
    todo: "Lengthen the window over the movement, or fit fewer terms.",
  },
} as const satisfies Record<string, Remark>;

export type ReasonCode = keyof typeof REASONS;
