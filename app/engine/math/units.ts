import { UNITS, type Unit } from "#app/engine/types.ts";

export type Dimension =
  | "angle"
  | "torque"
  | "time"
  | "voltage"
  | "force"
  | "length"
  | "pressure"
  | "number";

interface UnitFacts {
  dimension: Dimension;
  /** SI value = value · times / over; one of the two is 1, so that each conversion rounds once. */
  times: number;
  over: number;
}

/** Factors as in UCUM; 1 deg = π/180 rad. */
const FACTS: Record<Unit, UnitFacts> = {
  deg: { dimension: "angle", times: Math.PI / 180, over: 1 },
  rad: { dimension: "angle", times: 1, over: 1 },
  mrad: { dimension: "angle", times: 1, over: 1000 },
  "N.m": { dimension: "torque", times: 1, over: 1 },
  "N.mm": { dimension: "torque", times: 1, over: 1000 },
  "N.cm": { dimension: "torque", times: 1, over: 100 },
  "kN.m": { dimension: "torque", times: 1000, over: 1 },
  s: { dimension: "time", times: 1, over: 1 },
  ms: { dimension: "time", times: 1, over: 1000 },
  us: { dimension: "time", times: 1, over: 1e6 },
  V: { dimension: "voltage", times: 1, over: 1 },
  mV: { dimension: "voltage", times: 1, over: 1000 },
  uV: { dimension: "voltage", times: 1, over: 1e6 },
  N: { dimension: "force", times: 1, over: 1 },
  kN: { dimension: "force", times: 1000, over: 1 },
  m: { dimension: "length", times: 1, over: 1 },
  cm: { dimension: "length", times: 1, over: 100 },
  mm: { dimension: "length", times: 1, over: 1000 },
  Pa: { dimension: "pressure", times: 1, over: 1 },
  kPa: { dimension: "pressure", times: 1000, over: 1 },
  bar: { dimension: "pressure", times: 1e5, over: 1 },
  "1": { dimension: "number", times: 1, over: 1 },
};

export function dimensionOf(unit: Unit): Dimension {
  return FACTS[unit].dimension;
}

/** All units of one dimension, in the order of the protocol's list. */
export function unitsOf(dimension: Dimension): Unit[] {
  return UNITS.filter((unit) => FACTS[unit].dimension === dimension);
}

/** A value in `unit` → SI (rad, N·m, s, V, N, m, Pa, 1). */
export function toSi(value: number, unit: Unit): number {
  return siConversion(unit)(value);
}

/** {@link toSi} for many values of one unit. */
export function siConversion(unit: Unit): (value: number) => number {
  const { times, over } = FACTS[unit];
  return over === 1 ? (value) => value * times : (value) => value / over;
}

/** Ways in which laboratories write the units above, in small letters and without blanks. */
const SPELLINGS = new Map<string, Unit>(
  Object.entries({
    deg: "deg °,º,degree,degrees,degs",
    rad: "rad radian,radians",
    mrad: "mrad milliradian,milliradians",
    "N.m": "N.m nm,n-m,newtonmeter,newtonmetre,newton.meter,newton.metre",
    "N.mm": "N.mm nmm,n-mm",
    "N.cm": "N.cm ncm,n-cm",
    "kN.m": "kN.m knm,kn-m",
    s: "s sec,secs,second,seconds,sek",
    ms: "ms msec,msecs,millisecond,milliseconds,millisec",
    us: "us usec,usecs,microsecond,microseconds,microsec",
    V: "V volt,volts",
    mV: "mV millivolt,millivolts",
    uV: "uV microvolt,microvolts",
    N: "N newton,newtons",
    kN: "kN kilonewton,kilonewtons",
    m: "m meter,metre,meters,metres",
    cm: "cm centimeter,centimetre",
    mm: "mm millimeter,millimetre",
    Pa: "Pa pascal",
    kPa: "kPa kilopascal",
    bar: "bar bar",
    "1": "1 dimensionless,unitless",
  } satisfies Record<Unit, string>).flatMap(([code, list]) => {
    const unit = code as Unit;
    const others = list.slice(code.length + 1).split(",");
    return [code.toLowerCase(), ...others].map((spelling): [string, Unit] => [spelling, unit]);
  }),
);

/** Units that stand in files and that no channel of a protocol can have. */
const FOREIGN = new Set(
  "deg/s °/s rad/s deg/s2 deg/s^2 rad/s2 rad/s^2 m/s m/s2 m/s^2 mm/s hz khz kg g % a.u. au a ma °c degc counts count lsb psi mbar db n/m nm/rad nm/deg n.m/rad n.m/deg w j -- none bool logical".split(
    " ",
  ),
);

function plain(text: string): string {
  return text
    .trim()
    .replace(/^[[(]\s*(.*?)\s*[\])]$/, "$1")
    .replace(/[µμ]/g, "u")
    .replace(/\s*[·⋅∙*×]\s*/g, ".")
    .replace(/\s+/g, "");
}

/** "[ms]", "Nm", "N·m", "µV", "degrees" → the protocol's code; null where the text is no unit of the list. */
export function readUnit(text: string): Unit | null {
  const bare = plain(text);
  return UNITS.find((unit) => unit === bare) ?? SPELLINGS.get(bare.toLowerCase()) ?? null;
}

/** Whether a text is a unit at all, also one that no channel of a protocol can have. */
export function isUnitText(text: string): boolean {
  const bare = plain(text).toLowerCase();
  return bare === "-" || FOREIGN.has(bare) || readUnit(text) !== null;
}
