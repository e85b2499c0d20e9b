import { type Calibration, calibrate } from "#app/engine/channels/calibrate.ts";
import { rawExtremes } from "#app/engine/channels/clipping.ts";
import { checkDimensions } from "#app/engine/channels/dimensions.ts";
import { countMissing, fillMissing } from "#app/engine/channels/fill.ts";
import { momentAboutJoint } from "#app/engine/channels/force-plate.ts";
import { lineOfRow } from "#app/engine/channels/row-line.ts";
import { stampedTimeBase, statedTimeBase, type TimeBase } from "#app/engine/channels/time-base.ts";
import { EngineError, type FlagCode, flag, oneLine } from "#app/engine/errors.ts";
import { dimensionOf, readUnit } from "#app/engine/math/units.ts";
import type {
  AxisProtocol,
  AxisSignals,
  ChannelSignal,
  Flag,
  ForcePlateProtocol,
  Protocol,
  Segment,
  Signals,
  Table,
  Unit,
} from "#app/engine/types.ts";

const FEWEST_SAMPLES = 30;

interface MappedColumn {
  column: string;
  /** null for a trigger, which has no unit. */
  unit: Unit | null;
}

/** The columns that a protocol names, each once, in its order. */
export function columnsOf(protocol: Protocol): string[] {
  return [...new Set(mappedColumns(protocol).map(({ column }) => column))];
}

/**
 * Raw columns → signals in SI units on one time base.
 *
 * Missing samples are filled before calibration (only where the protocol allows it) and counted
 * before they are filled. Nothing is filtered, and the torque's lag is not applied.
 *
 * @param table  is used up: a column that is mapped once becomes its signal in place, since an hour's
 *   columns are not held twice
 * @throws EngineError "protocol" where a unit does not suit its field, "unreadable" where time runs
 *   backwards, is too coarse or missing, and for fewer than 30 samples
 */
export function toSignals(table: Table, protocol: Protocol): Signals {
  checkDimensions(protocol);
  if (table.rows < FEWEST_SAMPLES) {
    throw new EngineError(
      "unreadable",
      `The recording has ${table.rows} ${table.rows === 1 ? "sample" : "samples"}; at least ${FEWEST_SAMPLES} are needed.`,
    );
  }
  const mapped = mappedColumns(protocol);
  const columns = columnsOf(protocol);
  const constant = columns.filter((name) => isConstant(rawColumn(table, name)));
  const missing = columns.reduce((sum, name) => sum + countMissing(rawColumn(table, name)), 0);
  const longest = protocol.max_filled_samples;
  const isUsedOnce = (name: string) => mapped.filter(({ column }) => column === name).length === 1;
  const { base, filledStamps } = timeBaseOf(table, protocol, isUsedOnce);
  const channel = (column: string, calibration: Calibration): ChannelSignal =>
    channelOf(rawColumn(table, column), column, calibration, longest, base.segments, isUsedOnce);

  const axes = protocol.axes.map((axis) => axisOf(axis, channel, filledStamps));
  const emg = protocol.emg.map((entry): Signals["emg"][number] => {
    const signal = channel(entry.column.trim(), entry);
    const { muscle, reference } = entry;
    if (reference === undefined) {
      const unit = dimensionOf(entry.unit) === "voltage" ? "V" : "1";
      return { muscle, unit, channel: signal };
    }
    return { muscle, unit: "1", channel: { ...signal, si: signal.si.map((v) => v / reference) } };
  });
  const triggerColumn = protocol.onset.trigger_column;
  const trigger =
    triggerColumn === null
      ? null
      : fillMissing(rawColumn(table, triggerColumn.trim()), longest, base.segments).values;

  return {
    samples: table.rows,
    rateHz: base.rateHz,
    durationS: base.durationS,
    timeS: base.timeS,
    segments: base.segments,
    gapBefore: base.gapBefore,
    duplicateBefore: base.duplicateBefore,
    gaps: base.gapBefore.length,
    duplicates: base.duplicateBefore.length,
    missing,
    axes,
    trigger,
    emg,
    flags: [...table.flags, ...flagsOf(table, base, constant, mapped)],
    dialect: table.dialect,
  };
}

function mappedColumns({ time, axes, emg, onset }: Protocol): MappedColumn[] {
  const mapped: MappedColumn[] = [];
  const add = (column: string, unit: Unit | null) => mapped.push({ column: column.trim(), unit });
  if ("column" in time) add(time.column, time.unit);
  for (const axis of axes) {
    add(axis.angle.column, axis.angle.unit);
    if (axis.torque) add(axis.torque.column, axis.torque.unit);
    if (axis.torque_from) {
      const plate = axis.torque_from.force_plate;
      for (const column of plate.force) add(column, plate.force_unit);
      for (const column of plate.moment) add(column, plate.moment_unit);
    }
    if (axis.limb_angle) add(axis.limb_angle.column, axis.limb_angle.unit);
  }
  for (const { column, unit } of emg) add(column, unit);
  if (onset.trigger_column !== null) add(onset.trigger_column, null);
  return mapped;
}

function rawColumn(table: Table, name: string): Float64Array {
  const values = table.columns.get(name);
  if (values === undefined) throw new RangeError(`the column ${name} was not read`);
  return values;
}

function timeBaseOf(
  table: Table,
  protocol: Protocol,
  isUsedOnce: (column: string) => boolean,
): { base: TimeBase; filledStamps: Uint8Array | null } {
  const { time } = protocol;
  if ("rate_hz" in time) {
    return { base: statedTimeBase(table.rows, time.rate_hz), filledStamps: null };
  }
  const column = time.column.trim();
  const raw = rawColumn(table, column);
  const { values, filled } = fillMissing(raw, protocol.max_filled_samples);
  const stamps = values === raw && !isUsedOnce(column) ? raw.slice() : values;
  const lineOf = (row: number): number => lineOfRow(table, row);
  return { base: stampedTimeBase(stamps, time.unit, column, lineOf), filledStamps: filled };
}

function channelOf(
  raw: Float64Array,
  column: string,
  calibration: Calibration,
  longest: number,
  segments: Segment[],
  isUsedOnce: (column: string) => boolean,
): ChannelSignal {
  const extremes = rawExtremes(raw);
  const { values, filled } = fillMissing(raw, longest, segments);
  const si = values === raw && !isUsedOnce(column) ? raw.slice() : values;
  calibrate(si, calibration);
  return { column, si, ...extremes, filled };
}

function axisOf(
  axis: AxisProtocol,
  channel: (column: string, calibration: Calibration) => ChannelSignal,
  filledStamps: Uint8Array | null,
): AxisSignals {
  const measured = channel(axis.angle.column.trim(), axis.angle);
  // A filled stamp concerns every axis: it is marked on the angle, which each window looks at.
  const angle = { ...measured, filled: eitherFilled(measured.filled, filledStamps) };
  const limbAngle = axis.limb_angle
    ? channel(axis.limb_angle.column.trim(), axis.limb_angle)
    : null;
  if (axis.torque_from) {
    const { torqueNm, torqueChannels } = plateTorque(axis.torque_from.force_plate, channel);
    return { name: axis.name, angle, limbAngle, torqueNm, torqueChannels };
  }
  if (!axis.torque) throw new RangeError(`the axis ${axis.name} has no torque`);
  const torque = channel(axis.torque.column.trim(), axis.torque);
  return { name: axis.name, angle, limbAngle, torqueNm: torque.si, torqueChannels: [torque] };
}

function plateTorque(
  plate: ForcePlateProtocol,
  channel: (column: string, calibration: Calibration) => ChannelSignal,
): { torqueNm: Float64Array; torqueChannels: ChannelSignal[] } {
  const three = (names: [string, string, string], unit: Unit) => {
    const [x, y, z] = names;
    const read = (name: string): ChannelSignal => channel(name.trim(), { unit });
    return [read(x), read(y), read(z)] as const;
  };
  const [fx, fy, fz] = three(plate.force, plate.force_unit);
  const [mx, my, mz] = three(plate.moment, plate.moment_unit);
  return {
    torqueNm: momentAboutJoint(
      [fx.si, fy.si, fz.si],
      [mx.si, my.si, mz.si],
      plate.joint_to_plate_m,
      plate.about,
    ),
    torqueChannels: [fx, fy, fz, mx, my, mz],
  };
}

function eitherFilled(a: Uint8Array | null, b: Uint8Array | null): Uint8Array | null {
  if (a === null || b === null) return a ?? b;
  return a.map((value, i) => value | (b[i] as number));
}

function flagsOf(table: Table, base: TimeBase, constant: string[], mapped: MappedColumn[]): Flag[] {
  const flags: Flag[] = [];
  const raise = (code: FlagCode, about?: string) => flags.push(flag(code, about));
  if (base.jitter) raise("jitter");
  if (base.gapBefore.length > 0) raise("gaps");
  if (base.duplicateBefore.length > 0) raise("duplicates");
  if (constant.length > 0) raise("constant_channel", constant.map(oneLine).join(", "));
  const mismatched = new Set(mapped.flatMap((entry) => mismatchOf(table, entry)));
  if (mismatched.size > 0) raise("unit_mismatch", [...mismatched].join(", "));
  return flags;
}

function isConstant(raw: Float64Array): boolean {
  const first = raw.find((value) => !Number.isNaN(value));
  return first !== undefined && raw.every((value) => value === first || Number.isNaN(value));
}

/** What the file says of a column's unit where it is not the protocol's; "-" says nothing. */
function mismatchOf(table: Table, { column, unit }: MappedColumn): string[] {
  const written = table.units[table.header.indexOf(column)] ?? "";
  if (unit === null || written === "" || written === "-" || readUnit(written) === unit) return [];
  return [`${oneLine(column)} (${oneLine(written)}, not ${unit})`];
}
