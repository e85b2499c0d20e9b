import { type Dimension, dimensionOf, readUnit } from "#app/engine/math/units.ts";
import type {
  ProposedChannel,
  ProposedEmg,
  ProposedMap,
  ProposedTime,
  TablePreview,
  Unit,
} from "#app/engine/types.ts";

interface Column {
  name: string;
  /** Words of the name in small letters: "AngleFE (deg)" → angle, fe. */
  words: string[];
  unit: Unit | null;
  cells: string[];
}

const words = (list: string): Set<string> => new Set(list.split(" "));
const TIME = words("t time times timestamp timestamps zeit temps tijd tiempo tempo clock");
const ANGLE = words(
  "a ang angle angles theta θ th phi φ q pos position rot rotation winkel hoek deg rad enc encoder gonio goniometer electrogoniometer",
);
const TORQUE = words("trq tq torque torques moment mom m tau τ drehmoment koppel nm");
const LIMB = words("limb gonio goniometer electrogoniometer hand foot segment skin marker");
const TRIGGER = words("trig trigger ttl sync onset pulse start event");
const EMG = words("emg semg muscle");
/** What an angle or a torque is derived to, or was meant to be: never the measured quantity. */
const NOT_MEASURED = words(
  "vel velocity speed omega acc accel acceleration cmd command ref reference set setpoint target desired goal err error drive",
);
const MUSCLES = new Map(
  Object.entries({
    ecr: "extensor carpi radialis",
    ecu: "extensor carpi ulnaris",
    fcr: "flexor carpi radialis",
    fcu: "flexor carpi ulnaris",
    ta: "tibialis anterior",
    sol: "soleus",
    gm: "gastrocnemius medialis",
    mg: "gastrocnemius medialis",
    gl: "gastrocnemius lateralis",
    lg: "gastrocnemius lateralis",
    bb: "biceps brachii",
    bic: "biceps brachii",
    tb: "triceps brachii",
    tri: "triceps brachii",
    vl: "vastus lateralis",
    vm: "vastus medialis",
    rf: "rectus femoris",
    bf: "biceps femoris",
    st: "semitendinosus",
  }),
);

/**
 * Proposes which columns hold what, from their names, their units and their first values. Each
 * column is proposed once, and only where its name stands once.
 *
 * @param axes  the study's axes: their names, and what they are called in words
 */
export function proposeChannels(
  preview: TablePreview,
  axes: readonly { name: string; label: string }[],
): ProposedMap {
  const columns = columnsOfPreview(preview);
  const taken = new Set<string>();
  const take = <T extends ProposedChannel | null>(channel: T): T => {
    if (channel !== null) taken.add(channel.column);
    return channel;
  };
  const free = () => columns.filter(({ name }) => !taken.has(name));

  const time = take(proposeTime(free(), preview.dialect.decimal));
  const emg = free()
    .filter(isEmg)
    .map((column) => take(proposeEmg(column)));
  const trigger = free().find((column) => has(column, TRIGGER))?.name ?? null;
  if (trigger !== null) taken.add(trigger);
  const torques = candidates(free(), "torque", TORQUE);
  for (const { name } of torques) taken.add(name);
  const angles = candidates(free(), "angle", ANGLE);
  const limbs = angles.filter((column) => has(column, LIMB));
  const rigs = angles.filter((column) => !has(column, LIMB));
  // A lone angle is the axis's angle even if it is the limb's.
  const [own, second] = rigs.length > 0 ? [rigs, limbs] : [limbs, []];
  return {
    time,
    axes: axes.map((axis, i) => ({
      name: axis.name,
      angle: proposeFor(own, axes, i, "angle", ANGLE),
      torque: proposeFor(torques, axes, i, "torque", TORQUE),
      limbAngle: proposeFor(second, axes, i, "angle", ANGLE),
    })),
    trigger,
    emg,
  };
}

function columnsOfPreview({ header, units, rows, dialect }: TablePreview): Column[] {
  return header.flatMap((name, i): Column[] => {
    const cells = rows.map((row) => row[i] ?? "").filter((cell) => cell !== "");
    const numeric = cells.filter((cell) => numberIn(cell, dialect.decimal) !== null).length;
    const repeats = header.indexOf(name) !== header.lastIndexOf(name);
    if (name === "" || repeats || numeric === 0 || 2 * numeric < cells.length) return [];
    // Beside a column t, a T is a torque.
    const split = name === "T" && header.includes("t") ? ["torque"] : wordsOf(name);
    const last = split.length > 1 ? (split.at(-1) as string) : "";
    return [{ name, words: split, unit: readUnit(units[i] ?? "") ?? suffixUnit(last), cells }];
  });
}

function wordsOf(name: string): string[] {
  return name
    .replace(/[[(][^[\]()]*[\])]/g, " ")
    .replace(/(\p{Ll})(\p{Lu})/gu, "$1 $2")
    .toLowerCase()
    .split(/[^\p{L}]+/u)
    .filter((word) => word !== "");
}

/** "t_ms", "angle deg": the last word of a name, where it can be nothing but a unit. */
function suffixUnit(word: string): Unit | null {
  return /^(s|sec|ms|us|deg|rad|mrad|nm|mv|uv)$/.test(word) ? readUnit(word) : null;
}

function numberIn(cell: string, decimal: "." | ","): number | null {
  const value = Number(decimal === "," ? cell.replace(",", ".") : cell);
  return cell === "" || Number.isNaN(value) ? null : value;
}

function has(column: Column, vocabulary: Set<string>): boolean {
  return column.words.some((word) => vocabulary.has(word));
}

function isOf(column: Column, dimension: Dimension): boolean {
  return column.unit !== null && dimensionOf(column.unit) === dimension;
}

function proposeTime(columns: Column[], decimal: "." | ","): ProposedTime | null {
  const fitting = columns.filter(
    (column) => (column.unit === null || isOf(column, "time")) && grows(column, decimal),
  );
  const named = fitting.filter((column) => has(column, TIME));
  const column =
    named.find((c) => c.unit !== null) ??
    named[0] ??
    fitting.find((c) => c.unit !== null) ??
    // The first column of a table is its time where it grows evenly.
    (fitting[0] === columns[0] ? fitting[0] : undefined);
  if (column === undefined) return null;
  const unit = (column.unit ?? unitOfSteps(column, decimal)) as ProposedTime["unit"];
  return {
    column: column.name,
    unit,
    certain: column.unit !== null && named.length === 1 && named[0] === column,
  };
}

function stepsOf(column: Column, decimal: "." | ","): number[] {
  const values = column.cells.map((cell) => numberIn(cell, decimal));
  return values.flatMap((value, i) => {
    const before = values[i - 1];
    return value === null || before === null || before === undefined ? [] : [value - before];
  });
}

function grows(column: Column, decimal: "." | ","): boolean {
  const steps = stepsOf(column, decimal);
  return steps.every((step) => step >= 0) && steps.some((step) => step > 0);
}

/** The unit in which the steps make a rate between 20 Hz and 20 kHz: the three do not overlap. */
function unitOfSteps(column: Column, decimal: "." | ","): ProposedTime["unit"] {
  const steps = stepsOf(column, decimal).sort((a, b) => a - b);
  const median = steps[steps.length >> 1] ?? 0;
  if (median >= 5e-5 && median < 0.05) return "s";
  if (median >= 0.05 && median < 50) return "ms";
  if (median >= 50 && median < 50000) return "us";
  return null;
}

function isEmg(column: Column): boolean {
  const muscle = column.words.some((word) => MUSCLES.has(word));
  return has(column, EMG) || (isOf(column, "voltage") && !has(column, TRIGGER) && muscle);
}

function proposeEmg(column: Column): ProposedEmg {
  const code = column.words.find((word) => MUSCLES.has(word));
  const rest = column.words.filter((word) => !EMG.has(word) && suffixUnit(word) === null);
  const unit = isOf(column, "voltage") ? (column.unit as ProposedEmg["unit"]) : null;
  const muscle = (code && MUSCLES.get(code)) || rest.join(" ") || column.name;
  return { column: column.name, unit, muscle, certain: unit !== null && code !== undefined };
}

/** Columns that can hold a measured angle or torque, by unit or by name. */
function candidates(columns: Column[], dimension: Dimension, names: Set<string>): Column[] {
  return columns.filter(
    (column) =>
      !has(column, NOT_MEASURED) &&
      (isOf(column, dimension) || (column.unit === null && has(column, names))),
  );
}

/**
 * The column of one axis: the one that names it, else the only one there is, else, where there are
 * as many as axes and none names an axis, the one in its place.
 */
function proposeFor(
  columns: Column[],
  axes: readonly { name: string; label: string }[],
  index: number,
  dimension: Dimension,
  names: Set<string>,
): ProposedChannel | null {
  const axesOf = (column: Column) => axes.filter((axis) => namesAxis(column, axis));
  const named = columns.filter((column) => {
    const [first, second] = axesOf(column);
    return first === axes[index] && second === undefined;
  });
  const nameless = columns.filter((column) => axesOf(column).length === 0);
  let column = named.find((c) => has(c, names)) ?? named[0];
  let clear = named.length === 1;
  if (column === undefined && axes.length === 1) {
    column = nameless.find((c) => has(c, names)) ?? nameless[0];
    clear = columns.length === 1;
  } else if (column === undefined && nameless.length === columns.length) {
    column = columns.length === axes.length ? columns[index] : undefined;
    clear = false;
  } else if (column === undefined && nameless.length === 1) {
    // The other axes have theirs: what is left is this one's.
    const left = axes.filter((axis) => !columns.some((c) => namesAxis(c, axis)));
    column = left.length === 1 ? nameless[0] : undefined;
    clear = false;
  }
  if (column === undefined) return null;
  const { name, unit } = column;
  return { column: name, unit, certain: clear && isOf(column, dimension) && has(column, names) };
}

/** "ang_fe", "angle_flex" and "FlexionAngle" name the axis FE, flexion–extension. */
function namesAxis(column: Column, axis: { name: string; label: string }): boolean {
  const label = wordsOf(axis.label);
  const short = new Set([...wordsOf(axis.name), label.map((word) => word[0]).join("")]);
  return column.words.some(
    (word) =>
      short.has(word) || (word.length >= 3 && label.some((other) => other.startsWith(word))),
  );
}
