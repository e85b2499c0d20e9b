/**
 * The protocol: every choice that turns a recording into K, B and I. It is read as strictly as it
 * can be, since a key that is misspelt and quietly ignored changes a result without a word.
 */
import { z } from "zod";
import type { FilterProtocol, Impedance, Protocol, Term } from "#app/engine/types.ts";
import { canonicalJson } from "./canonical-json.ts";
import { type FieldProblem, oneOf, problemsOf, shownValue } from "./field-problem.ts";
import type { RecordingMap } from "./recording.ts";
import { parseStrictJson, StrictJsonError, shown } from "./strict-json.ts";

/** What is wrong with a protocol: the field, and a sentence that says what to do about it. */
export class ProtocolError extends Error {
  /** Dotted ("axes.0.angle.unit"); null where the text is no JSON document at all. */
  readonly field: string | null;
  /** Line of the text, from 1, where the text is no JSON document. */
  readonly line: number | null;

  constructor(field: string | null, message: string, line: number | null = null) {
    super(message);
    this.name = "ProtocolError";
    this.field = field;
    this.line = line;
  }
}

// ---------------------------------------------------------------- parts

const ANGLE_UNITS = ["deg", "rad", "mrad"] as const;
const TORQUE_UNITS = ["N.m", "N.mm", "N.cm", "kN.m"] as const;
const TIME_UNITS = ["s", "ms", "us"] as const;
const EMG_UNITS = ["V", "mV", "uV"] as const;
const FORCE_UNITS = ["N", "kN"] as const;

/** Furthest from the onset that a window or a baseline may reach, ms. */
const REACH_MS = 10_000;
/** A longer smoothing erases every perturbation, and takes its time over it. */
const LONGEST_SMOOTHING_MS = 1000;
/** Most values tried for each of the two choices of the robustness grid. */
const GRID_MAX = 64;

function unitOf<const U extends readonly [string, ...string[]]>(units: U, what: string) {
  return z.enum(units, {
    error: (issue) =>
      issue.input === undefined
        ? undefined
        : `${shownValue(issue.input)} is not a unit of ${what}; use ${oneOf(units)}.`,
  });
}

const column = z.string().trim().min(1, "The name of a column may not be empty.");
const word = z.string().refine((text) => text.trim() !== "", "The text may not be empty.");
const gain = z
  .number()
  .refine((value) => value !== 0, "A gain of 0 would erase the channel; state the true gain.");
const sign = z.literal([1, -1]);

function channelOf<const U extends readonly [string, ...string[]]>(units: U, what: string) {
  return z.strictObject({
    column,
    unit: unitOf(units, what),
    gain: gain.default(1),
    offset: z.number().default(0),
    sign: sign.default(1),
  });
}

const angle = channelOf(ANGLE_UNITS, "an angle");
const torque = channelOf(TORQUE_UNITS, "a torque");
const threeColumns = z.tuple([column, column, column]);

const axis = z
  .strictObject({
    name: word.refine((name) => name !== "__proto__", "An axis cannot have this name."),
    positive: word.default("positive"),
    negative: word.default("negative"),
    angle,
    torque: torque.optional(),
    torque_from: z
      .strictObject({
        force_plate: z.strictObject({
          force: threeColumns,
          moment: threeColumns,
          force_unit: unitOf(FORCE_UNITS, "a force"),
          moment_unit: unitOf(TORQUE_UNITS, "a moment"),
          joint_to_plate_m: z.tuple([z.number(), z.number(), z.number()]),
          about: z.enum(["x", "y", "z"]),
        }),
      })
      .optional(),
    limb_angle: angle.optional(),
    fit_angle: z.enum(["rig", "limb"]).optional(),
  })
  .superRefine((value, context) => {
    const problem = (field: string, message: string) =>
      context.addIssue({ code: "custom", path: [field], message });
    if (value.torque !== undefined && value.torque_from !== undefined) {
      problem(
        "torque_from",
        "An axis has its torque from one place; leave out torque_from or torque.",
      );
    }
    if (value.torque === undefined && value.torque_from === undefined) {
      problem("torque", "The torque of this axis is missing; give torque or torque_from.");
    }
    if (value.fit_angle === "limb" && value.limb_angle === undefined) {
      problem("fit_angle", "The limb's own angle cannot be fitted without limb_angle.");
    }
    if (value.positive === value.negative) {
      problem("negative", "The two directions of an axis need different names.");
    }
  });

const emg = z.strictObject({
  muscle: word,
  column,
  unit: unitOf(EMG_UNITS, "EMG"),
  reference: z.number().positive().optional(),
});

const table = z.strictObject({
  separator: z.enum(["auto", ",", ";", "\t", "|", " "]).default("auto"),
  decimal: z.enum(["auto", ".", ","]).default("auto"),
  header_row: z.union([z.literal("auto"), z.int().min(1)]).default("auto"),
});

const time = z
  .strictObject({
    column: column.optional(),
    unit: unitOf(TIME_UNITS, "time").optional(),
    rate_hz: z.number().positive().optional(),
  })
  .transform((value, context) => {
    const problem = (path: string[], message: string) => {
      context.addIssue({ code: "custom", path, message });
      return z.NEVER;
    };
    if (value.rate_hz !== undefined) {
      if (value.column === undefined && value.unit === undefined) return { rate_hz: value.rate_hz };
      return problem([], "Give a time column with its unit or rate_hz, not both.");
    }
    if (value.column === undefined && value.unit === undefined) {
      return problem([], "Give a time column with its unit, or rate_hz.");
    }
    if (value.column === undefined) return problem(["column"], "The time column is missing.");
    if (value.unit === undefined) {
      return problem(["unit"], `The unit of the time column is missing; use ${oneOf(TIME_UNITS)}.`);
    }
    return { column: value.column, unit: value.unit };
  });

const reach = z.number().min(-REACH_MS).max(REACH_MS);
const span = z
  .tuple([reach, reach])
  .refine(([start, end]) => start < end, "The end must come after the start.");

const term = z.enum(["K", "B", "I"]);
const impedance = z.strictObject({
  K: z.number().default(0),
  B: z.number().default(0),
  I: z.number().default(0),
});

const onsetFields = {
  from: z.enum(["angle", "trigger"]).default("angle"),
  cutoff_hz: z.number().positive().default(50),
  min_separation_ms: z.number().min(0).default(500),
  expected_amplitude_deg: z.number().positive().nullable().default(null),
  expected_duration_ms: z.number().positive().nullable().default(null),
};

/** What a study chooses; the rest of a protocol comes from the recording, the visit and the rig. */
const choiceFields = {
  filter: z
    .strictObject({
      family: z.literal("butterworth").default("butterworth"),
      order: z.int().min(1).max(8).default(2),
      cutoff_hz: z.number().positive().default(20),
    })
    .nullable()
    .prefault({}),
  derivative: z
    .union([
      z.literal("central"),
      z.strictObject({
        savitzky_golay: z.strictObject({
          polynomial: z.int().min(2).max(5),
          span_ms: z.number().positive().max(LONGEST_SMOOTHING_MS),
        }),
      }),
    ])
    .default("central"),
  reflex_limit_ms: z.number().min(0).default(50),
  background: z
    .strictObject({
      target: z.number().nullable().default(null),
      tolerance: z.number().min(0).nullable().default(null),
    })
    .prefault({}),
  baseline_ms: span.default([-50, 0]),
  window_ms: span.default([0, 100]),
  model: z
    .strictObject({
      terms: z.array(term).default(["K", "B", "I"]),
      fixed: z
        .strictObject({
          K: z.number().optional(),
          B: z.number().optional(),
          I: z.number().optional(),
        })
        .prefault({}),
      nonnegative: z.boolean().default(false),
    })
    .prefault({}),
  lag_ms: z.number().min(-100).max(100).default(0),
  max_filled_samples: z.int().min(0).default(0),
  robustness: z
    .strictObject({
      window_end_ms: z.array(reach).min(1).max(GRID_MAX),
      cutoff_hz: z.array(z.number().positive()).max(GRID_MAX).default([]),
    })
    .optional(),
  uncertainty: z
    .strictObject({
      level: z.number().min(0.5).max(0.999).default(0.95),
      resamples: z.int().min(100).max(100_000).default(2000),
      seed: z.int().default(1),
    })
    .prefault({}),
};

export const protocolChoicesSchema = z
  .strictObject({ ...choiceFields, onset: z.strictObject(onsetFields).prefault({}) })
  .superRefine(checkChoices);
export type ProtocolChoices = z.infer<typeof protocolChoicesSchema>;

export const protocolSchema = z
  .strictObject({
    version: z.literal(1),
    kind: z.literal("transient"),
    table: table.prefault({}),
    time,
    axes: z.array(axis).min(1, "At least one axis is needed."),
    emg: z.array(emg).default([]),
    onset: z
      .strictObject({ ...onsetFields, trigger_column: column.nullable().default(null) })
      .prefault({}),
    rig: z
      .record(z.string(), z.union([z.number(), impedance]))
      .prefault({})
      .transform(readRig),
    ...choiceFields,
  })
  .superRefine((protocol, context) => {
    checkChoices(protocol, context);
    const problem = (path: (string | number)[], message: string) =>
      context.addIssue({ code: "custom", path, message });
    const names = protocol.axes.map((each) => each.name);
    names.forEach((name, index) => {
      if (names.indexOf(name) < index) {
        problem(
          ["axes", index, "name"],
          `Two axes are called ${shown(name)}; each needs its own name.`,
        );
      }
    });
    if (protocol.onset.from === "trigger" && protocol.onset.trigger_column === null) {
      problem(["onset", "trigger_column"], "Onsets from a trigger need the trigger's column.");
    }
    if (!isOneForAll(protocol.rig)) {
      for (const name of Object.keys(protocol.rig)) {
        if (!names.includes(name)) {
          problem(["rig", name], `The protocol has no axis called ${shown(name)}.`);
        }
      }
    }
  });

/** Rules between the choices of one protocol. */
function checkChoices(
  choices: Omit<ProtocolChoices, "onset"> & {
    onset: Pick<ProtocolChoices["onset"], "expected_amplitude_deg" | "expected_duration_ms">;
  },
  context: z.RefinementCtx,
): void {
  const problem = (path: (string | number)[], message: string) =>
    context.addIssue({ code: "custom", path, message });

  const { expected_amplitude_deg, expected_duration_ms } = choices.onset;
  if (expected_amplitude_deg === null && expected_duration_ms !== null) {
    problem(
      ["onset", "expected_amplitude_deg"],
      "A duration is expected, so give the amplitude too.",
    );
  }
  if (expected_amplitude_deg !== null && expected_duration_ms === null) {
    problem(
      ["onset", "expected_duration_ms"],
      "An amplitude is expected, so give the duration too.",
    );
  }

  if (choices.background.target !== null && choices.background.tolerance === null) {
    problem(["background", "tolerance"], "A target torque needs the tolerance around it.");
  }

  const { terms, fixed } = choices.model;
  terms.forEach((each, index) => {
    if (terms.indexOf(each) < index) problem(["model", "terms", index], `${each} is named twice.`);
  });
  for (const each of fixedTerms(fixed)) {
    if (!terms.includes(each)) {
      problem(["model", "fixed", each], `${each} is fixed but is not among the model's terms.`);
    }
  }
  if (!terms.some((each) => fixed[each] === undefined)) {
    problem(["model", "terms"], "At least one term must be free; otherwise nothing is fitted.");
  }

  choices.robustness?.window_end_ms.forEach((end, index) => {
    if (end <= choices.window_ms[0]) {
      problem(
        ["robustness", "window_end_ms", index],
        `The window begins at ${choices.window_ms[0]} ms; each end tried must come after that.`,
      );
    }
  });
  if (choices.robustness?.cutoff_hz.length === 0 && choices.filter !== null) {
    problem(["robustness", "cutoff_hz"], "Give at least one cut-off to try, or no filter at all.");
  }
}

function fixedTerms(fixed: Partial<Impedance>): Term[] {
  return (["K", "B", "I"] as const).filter((each) => fixed[each] !== undefined);
}

/** One K, B, I for all axes, or one for each axis by its name; what is not given is 0. */
function readRig(
  given: Record<string, number | Impedance>,
  context: z.RefinementCtx,
): Impedance | Record<string, Impedance> {
  const values = Object.entries(given);
  const byName = values.flatMap(([name, value]): [string, Impedance][] =>
    typeof value === "number" ? [] : [[name, value]],
  );
  if (byName.length === 0) {
    const rig = impedance.safeParse(given);
    if (rig.success) return rig.data;
    const name = values.map(([key]) => key).find((key) => !TERM_NAMES.includes(key)) ?? "";
    context.addIssue({ code: "custom", path: [name], message: RIG_SHAPE });
    return z.NEVER;
  }
  const single = values.find(([, value]) => typeof value === "number");
  if (single !== undefined) {
    context.addIssue({ code: "custom", path: [single[0]], message: RIG_SHAPE });
  }
  return Object.fromEntries(byName);
}

const TERM_NAMES: readonly string[] = term.options;
const RIG_SHAPE =
  "A rig is one { K, B, I } for all axes or one { K, B, I } for each axis by its name.";

function isOneForAll(rig: Impedance | Record<string, Impedance>): rig is Impedance {
  return Object.values(rig).every((value) => typeof value === "number");
}

/** A rig given by names is 0 for the axes that it does not name. */
function rigOfEachAxis(protocol: z.infer<typeof protocolSchema>): Protocol["rig"] {
  const { rig, axes } = protocol;
  if (isOneForAll(rig)) return rig;
  const named = new Map(Object.entries(rig));
  return Object.fromEntries(
    axes.map(({ name }) => [name, named.get(name) ?? { K: 0, B: 0, I: 0 }]),
  );
}

// ---------------------------------------------------------------- reading

/** Kinds of the contract that this engine does not analyse, with the keys that only they have. */
const OTHER_KINDS = ["continuous", "sweep", "bench"] as const;
const KEYS_OF_OTHER_KINDS: Record<string, (typeof OTHER_KINDS)[number]> = {
  welch: "continuous",
  band_hz: "continuous",
  "axes.drive": "continuous",
  directions_deg: "sweep",
  speed_deg_s: "sweep",
  bench: "bench",
};

/**
 * Reads a PROTOCOL document and fills in the defaults.
 *
 * @throws ProtocolError
 */
export function parseProtocol(text: string): Protocol {
  const document = readDocument(text);
  refuseHiddenKeys(document, []);
  if (typeof document !== "object" || document === null || Array.isArray(document)) {
    throw new ProtocolError(null, "A protocol is one JSON object in { braces }.");
  }
  const { version, kind } = document as Record<string, unknown>;
  if (version === undefined) throw new ProtocolError("version", "The version is missing; it is 1.");
  if (version !== 1) {
    throw new ProtocolError("version", `Version ${shownValue(version)} is not known; use 1.`);
  }
  if (kind === undefined) {
    throw new ProtocolError("kind", 'The kind is missing; this version analyses "transient".');
  }
  if (kind !== "transient") {
    throw new ProtocolError(
      "kind",
      OTHER_KINDS.some((each) => each === kind)
        ? `Kind ${shownValue(kind)} is not analysed by this version; it analyses "transient".`
        : `${shownValue(kind)} is not a kind of protocol; use "transient".`,
    );
  }
  const read = protocolSchema.safeParse(document);
  if (read.success) return { ...read.data, rig: rigOfEachAxis(read.data) };
  const [first] = problemsIn(read.error, document);
  throw new ProtocolError(first?.field ?? null, first?.sentence ?? "The protocol cannot be read.");
}

function readDocument(text: string): unknown {
  try {
    return parseStrictJson(text);
  } catch (error) {
    if (error instanceof StrictJsonError) throw new ProtocolError(null, error.message, error.line);
    throw error;
  }
}

/** Objects drop a key called `__proto__` on copying, so it is refused before anything is copied. */
function refuseHiddenKeys(value: unknown, path: (string | number)[]): void {
  if (typeof value !== "object" || value === null) return;
  for (const [key, entry] of Object.entries(value)) {
    if (key === "__proto__") {
      throw new ProtocolError(
        [...path, key].join("."),
        "This is not a key of a protocol; remove it.",
      );
    }
    refuseHiddenKeys(entry, [...path, key]);
  }
}

/** Checks choices as typed into a form; all problems at once, so that each can stand by its field. */
export function readProtocolChoices(
  value: unknown,
): { status: "valid"; choices: ProtocolChoices } | { status: "invalid"; problems: FieldProblem[] } {
  const read = protocolChoicesSchema.safeParse(value);
  return read.success
    ? { status: "valid", choices: read.data }
    : { status: "invalid", problems: problemsIn(read.error, value) };
}

export const defaultChoices: ProtocolChoices = protocolChoicesSchema.parse({});

function problemsIn(error: z.ZodError, document: unknown): FieldProblem[] {
  return problemsOf(error, document, unknownKey);
}

function unknownKey(path: PropertyKey[], key: string): string | null {
  const place = [...path.filter((part) => typeof part === "string"), key].map(String).join(".");
  const kind = Object.hasOwn(KEYS_OF_OTHER_KINDS, place) ? KEYS_OF_OTHER_KINDS[place] : undefined;
  if (kind === undefined) return null;
  return `${shown(key)} belongs to the kind "${kind}"; remove it from a protocol for "transient".`;
}

// ---------------------------------------------------------------- compiling

/** The distances of a visit, e.g. from the joint centre to a plate. */
export interface VisitGeometry {
  jointToPlateM?: [number, number, number];
}

/**
 * Joins a study's choices with the recording's channel map, the axes' directions and the rig's own
 * K, B, I into the PROTOCOL document that is stored with a fit and exported.
 *
 * `geometry` has no part in the torque of a map whose torque is a column of its own.
 *
 * @param axes  the study's axes; each axis of the map must be among them
 * @param rig  by axis name; null where it was not measured (nothing is removed)
 * @returns the protocol, and its text: sorted keys, no white space
 * @throws ProtocolError where map and choices do not suit each other
 */
export function compileProtocol(input: {
  choices: ProtocolChoices;
  map: RecordingMap;
  axes: readonly { name: string; positive: string; negative: string }[];
  geometry: VisitGeometry;
  rig: Readonly<Record<string, Impedance>> | null;
}): { protocol: Protocol; text: string } {
  const { choices, map, axes, rig } = input;
  const rigByAxis: Record<string, Impedance> = {};
  const mappedAxes = map.axes.map((mapped, index) => {
    const studyAxis = axes.find((each) => each.name === mapped.name);
    if (studyAxis === undefined) {
      throw new ProtocolError(
        `axes.${index}.name`,
        `The study has no axis called ${shown(mapped.name)}; map the recording to one of its axes.`,
      );
    }
    const own = rig !== null && Object.hasOwn(rig, mapped.name) ? rig[mapped.name] : undefined;
    rigByAxis[mapped.name] = own ?? { K: 0, B: 0, I: 0 };
    return {
      name: mapped.name,
      positive: studyAxis.positive,
      negative: studyAxis.negative,
      angle: mapped.angle,
      torque: mapped.torque,
      limb_angle: mapped.limb_angle,
    };
  });
  const text = canonicalJson({
    ...choices,
    version: 1,
    kind: "transient",
    table: map.table,
    time: map.time,
    axes: mappedAxes,
    emg: map.emg,
    onset: {
      ...choices.onset,
      trigger_column: choices.onset.from === "trigger" ? map.trigger : null,
    },
    rig: rigByAxis,
  });
  return { protocol: parseProtocol(text), text };
}

// ---------------------------------------------------------------- in words

/** The rate at which the filter's figures are said where none is known. */
const USUAL_RATE_HZ = 1000;

/**
 * Where the low-pass is −3 dB after both passes: each pass may then lose only half, so
 * f = cutoff · (√2 − 1)^(1/2n) for the analogue filter of order n. The bilinear transform bends the
 * frequency axis, so at a rate the same is said of tan(π f / rate). NaN from rate / 2 on.
 */
export function bothPassesCutoffHz(filter: FilterProtocol, rateHz: number): number {
  if (filter.cutoff_hz >= rateHz / 2) return Number.NaN;
  const factor = (Math.SQRT2 - 1) ** (1 / (2 * filter.order));
  return (rateHz / Math.PI) * Math.atan(Math.tan((Math.PI * filter.cutoff_hz) / rateHz) * factor);
}

/** One line of a protocol as a person reads it. */
export interface DescribedChoice {
  label: string;
  value: string;
}

/**
 * A study's choices in words, in the order in which the engine uses them.
 *
 * @param rateHz  the recording's rate, where it is known: the filter's second figure depends on it
 */
export function describeChoices(
  choices: ProtocolChoices,
  rateHz: number = USUAL_RATE_HZ,
): DescribedChoice[] {
  const { filter, derivative, onset, background, model, robustness, uncertainty } = choices;
  const lines: DescribedChoice[] = [];
  const line = (label: string, value: string) => lines.push({ label, value });

  line(
    "Low-pass filter",
    filter === null
      ? "None"
      : `Butterworth, order ${filter.order}, forwards and backwards, on angle and torque alike; ${cutoffsInWords(filter, rateHz)}`,
  );
  line(
    "Derivatives",
    derivative === "central"
      ? "Five-point central differences"
      : `Five-point central differences after Savitzky–Golay smoothing of angle and torque (polynomial ${derivative.savitzky_golay.polynomial}, ${number(derivative.savitzky_golay.span_ms)} ms)`,
  );
  line(
    "Onset",
    onset.from === "angle"
      ? `From the angle's velocity, filtered at ${number(onset.cutoff_hz)} Hz`
      : "From the trigger",
  );
  line("Least time between onsets", `${number(onset.min_separation_ms)} ms`);
  line(
    "Expected movement",
    onset.expected_amplitude_deg === null || onset.expected_duration_ms === null
      ? "Not stated"
      : `${number(onset.expected_amplitude_deg)}° in ${number(onset.expected_duration_ms)} ms`,
  );
  line("Baseline", spanInWords(choices.baseline_ms));
  line("Window", spanInWords(choices.window_ms));
  line("Reflex limit", `${number(choices.reflex_limit_ms)} ms after onset`);
  line(
    "Background torque",
    background.target === null || background.tolerance === null
      ? "No target"
      : `${number(background.target)} ± ${number(background.tolerance)} N·m`,
  );
  line("Model", modelInWords(model));
  line(
    "Delay of the torque",
    choices.lag_ms === 0 ? "None corrected" : `${number(choices.lag_ms)} ms, corrected`,
  );
  line(
    "Missing samples",
    choices.max_filled_samples === 0
      ? "Never filled"
      : `Filled along a straight line where no more than ${choices.max_filled_samples} in a row are missing`,
  );
  if (robustness !== undefined) {
    const ends = robustness.window_end_ms.map(number).join(", ");
    const cutoffs = robustness.cutoff_hz.map(number).join(", ");
    line(
      "Also tried",
      filter === null
        ? `Window ends of ${ends} ms`
        : `Window ends of ${ends} ms, each with cut-offs of ${cutoffs} Hz`,
    );
  }
  line(
    "Interval",
    `${number(uncertainty.level * 100)} %, Student's t over windows; beside it a bootstrap over windows (${uncertainty.resamples} resamples, seed ${uncertainty.seed})`,
  );
  return lines;
}

function cutoffsInWords(filter: FilterProtocol, rateHz: number): string {
  const onePass = `−3 dB at ${number(filter.cutoff_hz)} Hz after one pass`;
  const bothPasses = bothPassesCutoffHz(filter, rateHz);
  return Number.isNaN(bothPasses)
    ? `${onePass}, which a rate of ${number(rateHz)} Hz cannot carry`
    : `${onePass}, at ${number(bothPasses)} Hz after both (at ${number(rateHz)} samples a second)`;
}

const TERM_WORDS = { K: "stiffness K", B: "damping B", I: "inertia I" } as const;
const TERM_UNITS = { K: "N·m/rad", B: "N·m·s/rad", I: "kg·m²" } as const;

function modelInWords(model: ProtocolChoices["model"]): string {
  const inOrder = (["K", "B", "I"] as const).filter((each) => model.terms.includes(each));
  const parts = inOrder.map((each) => {
    const value = model.fixed[each];
    return value === undefined
      ? TERM_WORDS[each]
      : `${TERM_WORDS[each]} fixed at ${number(value)} ${TERM_UNITS[each]}`;
  });
  const bounds = model.nonnegative ? "; no free term below 0" : "";
  return `Torque from ${parts.join(", ")}${bounds}`;
}

function spanInWords([start, end]: readonly [number, number]): string {
  return `${number(start)} to ${number(end)} ms from onset`;
}

/** Four significant digits at most, with a true minus. */
function number(value: number): string {
  return String(Number(value.toPrecision(4))).replace("-", "−");
}
