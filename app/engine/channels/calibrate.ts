import { toSi } from "#app/engine/math/units.ts";
import type { Unit } from "#app/engine/types.ts";

export interface Calibration {
  unit: Unit;
  gain?: number;
  offset?: number;
  sign?: 1 | -1;
}

/** value = sign · (raw − offset) · gain, then unit → SI; missing samples stay missing. */
export function calibrate(
  raw: Float64Array,
  { unit, gain = 1, offset = 0, sign = 1 }: Calibration,
): Float64Array {
  return raw.map((value) => toSi(sign * (value - offset) * gain, unit));
}
