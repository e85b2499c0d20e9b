import { readDecimal } from "#app/domain/protocol-form.ts";
import type { RecordingMap } from "#app/domain/recording.ts";
import { mapForSide, type RigMap, type TestedSide } from "#app/domain/rig-map.ts";
import type { ProposedChannel, ProposedMap, TableProtocol, Unit } from "#app/engine/types.ts";

/**
 * A channel map on its way: what stands in the fields, as typed, for both tested sides. It becomes
 * a `RecordingMap` for one side once nothing is missing.
 */

export const ANGLE_UNITS = ["deg", "rad", "mrad"] as const satisfies readonly Unit[];
export const TORQUE_UNITS = ["N.m", "N.mm", "N.cm", "kN.m"] as const satisfies readonly Unit[];
export const TIME_UNITS = ["s", "ms", "us"] as const;
export const EMG_UNITS = ["V", "mV", "uV"] as const;

export type Sign = 1 | -1;

export interface ChannelDraft {
  /** "" where none is chosen. */
  column: string;
  unit: string;
  gain: string;
  offset: string;
  sign: Record<TestedSide, Sign>;
  /** Proposed, and name and unit leave doubt. */
  isGuess: boolean;
}

export interface AxisDraft {
  /** Name of one of the study's axes. */
  name: string;
  /** Whether the file holds this axis at all. */
  mapped: boolean;
  angle: ChannelDraft;
  torque: ChannelDraft;
  /** Its column is "" where there is no second angle. */
  limbAngle: ChannelDraft;
  /** Whether the signs were ever confirmed for a limb of this side. */
  known: Record<TestedSide, boolean>;
  /** The channels as they were when a person confirmed the movement; null before. */
  confirmed: Record<TestedSide, string | null>;
}

export interface EmgDraft {
  muscle: string;
  column: string;
  unit: string;
}

export interface MapDraft {
  timeFrom: "column" | "rate";
  timeColumn: string;
  timeUnit: string;
  isTimeGuess: boolean;
  rateHz: string;
  axes: AxisDraft[];
  /** "" where there is none. */
  trigger: string;
  emg: EmgDraft[];
  /** Where it came from before a person changed it. */
  from: "rig" | "columns";
}

export function otherSide(side: TestedSide): TestedSide {
  return side === "left" ? "right" : "left";
}

// ---------------------------------------------------------------- where a map comes from

/** The rig's remembered map, where all its columns stand in this file; else null. */
export function draftFromRig(
  rig: RigMap | null,
  header: readonly string[],
  axisNames: readonly string[],
): MapDraft | null {
  if (rig === null) return null;
  const sides = {
    left: mapForSide(rig, "left", axisNames),
    right: mapForSide(rig, "right", axisNames),
  };
  const { map } = sides.right;
  if (map.axes.length === 0 || !columnsOf(map).every((column) => standsOnce(header, column))) {
    return null;
  }
  type Mapped = RecordingMap["axes"][number];
  const draftOf = (index: number, pick: (axis: Mapped) => Mapped["angle"] | undefined) => {
    const channel = pick(map.axes[index] as Mapped);
    if (channel === undefined) return emptyChannel("deg");
    const signOf = (side: TestedSide) =>
      pick(sides[side].map.axes[index] as Mapped)?.sign ?? channel.sign;
    return {
      column: channel.column,
      unit: channel.unit,
      gain: String(channel.gain),
      offset: String(channel.offset),
      sign: { left: signOf("left"), right: signOf("right") },
      isGuess: false,
    };
  };
  return {
    ...timeOf(map),
    axes: axisNames.map((name) => {
      const index = map.axes.findIndex((axis) => axis.name === name);
      if (index < 0) return emptyAxis(name);
      return {
        name,
        mapped: true,
        angle: draftOf(index, (axis) => axis.angle),
        torque: draftOf(index, (axis) => axis.torque),
        limbAngle: draftOf(index, (axis) => axis.limb_angle),
        known: {
          left: !sides.left.unsure.includes(name),
          right: !sides.right.unsure.includes(name),
        },
        confirmed: { left: null, right: null },
      };
    }),
    trigger: map.trigger ?? "",
    emg: map.emg.map((channel) => ({ ...channel })),
    from: "rig",
  };
}

/**
 * What the columns' names and units suggest, for the study's axes in their order.
 *
 * @param axisNames  of the study
 * @param only  the one axis that the file's name tells of, or null
 */
export function draftFromColumns(
  proposed: ProposedMap,
  axisNames: readonly string[],
  only: string | null,
): MapDraft {
  const wanted = only === null ? axisNames : [only];
  const axes = axisNames.map((name): AxisDraft => {
    const own = proposed.axes.find((axis) => axis.name === name);
    const axis = emptyAxis(name);
    if (own === undefined || !wanted.includes(name)) return { ...axis, mapped: name === only };
    return {
      ...axis,
      mapped: name === only || (own.angle !== null && own.torque !== null),
      angle: filled(axis.angle, own.angle),
      torque: filled(axis.torque, own.torque),
      limbAngle: filled(axis.limbAngle, own.limbAngle),
    };
  });
  // No axis is there whole: the first that shows at all is asked for.
  const first = axes.find(({ angle, torque }) => angle.column + torque.column !== "") ?? axes[0];
  if (first && !axes.some((axis) => axis.mapped)) first.mapped = true;
  return {
    timeFrom: "column",
    timeColumn: proposed.time?.column ?? "",
    timeUnit: proposed.time?.unit ?? "",
    isTimeGuess: proposed.time?.certain === false,
    rateHz: "",
    axes,
    trigger: proposed.trigger ?? "",
    emg: proposed.emg.map(({ muscle, column, unit }) => ({ muscle, column, unit: unit ?? "" })),
    from: "columns",
  };
}

function filled(channel: ChannelDraft, found: ProposedChannel | null): ChannelDraft {
  if (found === null) return channel;
  return { ...channel, column: found.column, unit: found.unit ?? "", isGuess: !found.certain };
}

function timeOf(map: RecordingMap) {
  return "rate_hz" in map.time
    ? {
        timeFrom: "rate" as const,
        timeColumn: "",
        timeUnit: "",
        isTimeGuess: false,
        rateHz: String(map.time.rate_hz),
      }
    : {
        timeFrom: "column" as const,
        timeColumn: map.time.column,
        timeUnit: map.time.unit,
        isTimeGuess: false,
        rateHz: "",
      };
}

function emptyChannel(unit: Unit): ChannelDraft {
  return { column: "", unit, gain: "1", offset: "0", sign: { left: 1, right: 1 }, isGuess: false };
}

function emptyAxis(name: string): AxisDraft {
  return {
    name,
    mapped: false,
    angle: emptyChannel("deg"),
    torque: emptyChannel("N.m"),
    limbAngle: emptyChannel("deg"),
    known: { left: false, right: false },
    confirmed: { left: null, right: null },
  };
}

function columnsOf(map: RecordingMap): string[] {
  return [
    ...("column" in map.time ? [map.time.column] : []),
    ...map.axes.flatMap((axis) => [
      axis.angle.column,
      axis.torque.column,
      ...(axis.limb_angle ? [axis.limb_angle.column] : []),
    ]),
    ...(map.trigger === null ? [] : [map.trigger]),
    ...map.emg.map((channel) => channel.column),
  ];
}

function standsOnce(header: readonly string[], column: string): boolean {
  const at = header.indexOf(column);
  return at >= 0 && !header.includes(column, at + 1);
}

// ---------------------------------------------------------------- what is wrong with one

export interface MapProblem {
  /** Which field: "time", "timeUnit", "rateHz", "trigger", "axes", "FE.angle.column", "emg.0.muscle" … */
  field: string;
  /** In few words, for the list of files: "torque of flexion–extension". */
  short: string;
  sentence: string;
}

export interface MapSurroundings {
  header: readonly string[];
  axes: readonly { name: string; label: string }[];
  /** The study's protocol finds onsets by the trigger. */
  needsTrigger: boolean;
}

/** Everything that keeps a draft from being a map of this file, in the order of the fields. */
export function problemsOfMap(draft: MapDraft, around: MapSurroundings): MapProblem[] {
  const problems: MapProblem[] = [];
  const note = (field: string, short: string, sentence: string) =>
    problems.push({ field, short, sentence });
  const column = (field: string, what: string, name: string, phrase = `the ${what}`) => {
    if (name === "") note(field, what, `Choose the column of ${phrase}.`);
    else if (!around.header.includes(name)) {
      note(field, what, `This file has no column “${name}”: choose the column of ${phrase}.`);
    } else if (!standsOnce(around.header, name)) {
      note(
        field,
        what,
        `Two columns are called “${name}”: give each a name of its own in the file.`,
      );
    }
  };

  if (draft.timeFrom === "column") {
    column("time", "time", draft.timeColumn, "time");
    if (draft.timeUnit === "") note("timeUnit", "unit of time", "Choose the unit of time.");
  } else if (!((readDecimal(draft.rateHz) ?? 0) > 0)) {
    note("rateHz", "rate", "Write the rate in samples per second, for example 2000.");
  }

  const mapped = draft.axes.filter((axis) => axis.mapped);
  if (mapped.length === 0) note("axes", "an axis", "Say which axis the file holds.");
  if (mapped.length > 2) note("axes", "one or two axes", "A recording has one axis or two.");
  for (const axis of mapped) {
    const label = around.axes.find(({ name }) => name === axis.name)?.label ?? axis.name;
    const channels = [
      ["angle", "angle", axis.angle],
      ["torque", "torque", axis.torque],
      ["limbAngle", "limb’s own angle", axis.limbAngle],
    ] as const;
    for (const [key, word, channel] of channels) {
      if (key === "limbAngle" && channel.column === "") continue;
      const what = `${word} of ${label}`;
      column(`${axis.name}.${key}.column`, what, channel.column);
      if (channel.unit === "") {
        note(`${axis.name}.${key}.unit`, `unit of ${what}`, `Choose the unit of the ${what}.`);
      }
      if (!readDecimal(channel.gain)) {
        note(
          `${axis.name}.${key}.gain`,
          `gain of ${what}`,
          "Write the gain as a number that is not 0, for example 1.",
        );
      }
      if (readDecimal(channel.offset) === null) {
        note(
          `${axis.name}.${key}.offset`,
          `offset of ${what}`,
          "Write the offset as a number, for example 0.",
        );
      }
    }
  }

  if (draft.trigger !== "") column("trigger", "trigger", draft.trigger);
  else if (around.needsTrigger) {
    note(
      "trigger",
      "trigger",
      "The study’s protocol finds onsets by the trigger: choose its column.",
    );
  }
  draft.emg.forEach((channel, index) => {
    const what = `muscle ${index + 1}`;
    if (channel.muscle.trim() === "") {
      note(`emg.${index}.muscle`, `name of ${what}`, "Name the muscle, or take the line away.");
    }
    column(`emg.${index}.column`, what, channel.column, what);
    if (channel.unit === "") {
      note(`emg.${index}.unit`, `unit of ${what}`, `Choose the unit of ${what}.`);
    }
  });
  problems.push(...sharedColumns(mapped, around));
  return problems;
}

/** One column cannot be two things at once. */
function sharedColumns(mapped: readonly AxisDraft[], around: MapSurroundings): MapProblem[] {
  const seen = new Map<string, string>();
  const problems: MapProblem[] = [];
  for (const axis of mapped) {
    const label = around.axes.find(({ name }) => name === axis.name)?.label ?? axis.name;
    for (const key of ["angle", "torque"] as const) {
      const { column } = axis[key];
      if (column === "") continue;
      const what = `${key} of ${label}`;
      const other = seen.get(column);
      if (other !== undefined) {
        problems.push({
          field: `${axis.name}.${key}.column`,
          short: what,
          sentence: `“${column}” is the ${other} already: choose another column for the ${what}.`,
        });
      }
      seen.set(column, what);
    }
  }
  return problems;
}

// ---------------------------------------------------------------- the map itself

/**
 * The map that is stored with a recording of this side. Only for a draft without problems.
 *
 * @param side  null: every sign as recorded, for looking at a file
 */
export function recordingMapOf(
  draft: MapDraft,
  table: TableProtocol,
  side: TestedSide | null,
): RecordingMap {
  const channel = ({ column, unit, gain, offset, sign }: ChannelDraft) => ({
    column,
    unit: unit as Unit,
    gain: readDecimal(gain) ?? 1,
    offset: readDecimal(offset) ?? 0,
    sign: side === null ? (1 as const) : sign[side],
  });
  return {
    table,
    time:
      draft.timeFrom === "rate"
        ? { rate_hz: readDecimal(draft.rateHz) ?? 0 }
        : {
            column: draft.timeColumn,
            unit: draft.timeUnit as (typeof TIME_UNITS)[number],
          },
    axes: draft.axes
      .filter((axis) => axis.mapped)
      .map((axis) => ({
        name: axis.name,
        angle: channel(axis.angle),
        torque: channel(axis.torque),
        ...(axis.limbAngle.column !== "" && { limb_angle: channel(axis.limbAngle) }),
      })),
    trigger: draft.trigger === "" ? null : draft.trigger,
    emg: draft.emg.map(({ muscle, column, unit }) => ({
      muscle: muscle.trim(),
      column,
      unit: unit as (typeof EMG_UNITS)[number],
    })),
  };
}

// ---------------------------------------------------------------- signs, for the tested side

/** The axis' channels for this side in one text: what a confirmation was about. */
export function channelsInText(axis: AxisDraft, side: TestedSide): string {
  return JSON.stringify(
    [axis.angle, axis.torque, axis.limbAngle].map(({ column, unit, gain, sign }) => [
      column,
      unit,
      readDecimal(gain),
      sign[side],
    ]),
  );
}

/** Whether a person confirmed the movement of this axis with the channels as they are now. */
export function isConfirmed(axis: AxisDraft, side: TestedSide): boolean {
  return axis.confirmed[side] === channelsInText(axis, side);
}

function changeAxis(
  draft: MapDraft,
  axisName: string,
  change: (axis: AxisDraft) => AxisDraft,
): MapDraft {
  return {
    ...draft,
    axes: draft.axes.map((axis) => (axis.name === axisName ? change(axis) : axis)),
  };
}

/**
 * The person saw the movement and says that it went this way. Where the other side was never seen,
 * the opposite signs are proposed for it, as `mapForSide` does.
 */
export function confirmMovement(draft: MapDraft, axisName: string, side: TestedSide): MapDraft {
  return changeAxis(draft, axisName, (axis) => {
    const other = otherSide(side);
    const opposite = (channel: ChannelDraft): ChannelDraft =>
      axis.known[other]
        ? channel
        : { ...channel, sign: { ...channel.sign, [other]: channel.sign[side] === 1 ? -1 : 1 } };
    const next = {
      ...axis,
      angle: opposite(axis.angle),
      torque: opposite(axis.torque),
      limbAngle: opposite(axis.limbAngle),
      known: { ...axis.known, [side]: true },
    };
    return { ...next, confirmed: { ...axis.confirmed, [side]: channelsInText(next, side) } };
  });
}

function turned(channel: ChannelDraft, side: TestedSide): ChannelDraft {
  return { ...channel, sign: { ...channel.sign, [side]: channel.sign[side] === 1 ? -1 : 1 } };
}

/** The limb went the other way: angle and torque turn together, so that K keeps its sign. */
export function turnMovement(draft: MapDraft, axisName: string, side: TestedSide): MapDraft {
  return changeAxis(draft, axisName, (axis) => ({
    ...axis,
    angle: turned(axis.angle, side),
    torque: turned(axis.torque, side),
    limbAngle: turned(axis.limbAngle, side),
  }));
}

/** Only the torque turns: K changes its sign. */
export function turnTorque(draft: MapDraft, axisName: string, side: TestedSide): MapDraft {
  return changeAxis(draft, axisName, (axis) => ({ ...axis, torque: turned(axis.torque, side) }));
}

// ---------------------------------------------------------------- which column is what

/** What each column of the file is mapped to, in words; columns that are nothing are left out. */
export function rolesOfColumns(
  draft: MapDraft,
  axes: readonly { name: string; label: string }[],
): Map<string, string> {
  const roles = new Map<string, string>();
  const add = (column: string, role: string) => {
    if (column !== "")
      roles.set(column, roles.has(column) ? `${roles.get(column)}, ${role}` : role);
  };
  if (draft.timeFrom === "column") add(draft.timeColumn, "time");
  for (const axis of draft.axes.filter(({ mapped }) => mapped)) {
    const name = axes.length > 1 ? ` ${axis.name}` : "";
    add(axis.angle.column, `angle${name}`);
    add(axis.torque.column, `torque${name}`);
    add(axis.limbAngle.column, `limb angle${name}`);
  }
  add(draft.trigger, "trigger");
  for (const { column, muscle } of draft.emg) add(column, muscle === "" ? "EMG" : muscle);
  return roles;
}

/** Whether a remembered sign is only the opposite of the other side's, never seen itself. */
export function isSignGuessed(axis: AxisDraft, side: TestedSide): boolean {
  return !axis.known[side] && axis.known[otherSide(side)];
}
