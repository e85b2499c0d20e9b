import { siConversion } from "#app/engine/math/units.ts";
import type { Unit } from "#app/engine/types.ts";

export interface Calibration {
  unit: Unit;
  gain?: number;
  offset?: number;
  sign?: 1 | -1;
}

/** value = sign · (raw − offset) · gain, then unit → SI, in place; missing samples stay missing. */
export function calibrate(
  values: Float64Array,
  { unit, gain = 1, offset = 0, sign = 1 }: Calibration,
): void {
  const si = siConversion(unit);
  for (let i = 0; i < values.length; i++) {
    values[i] = si(sign * ((values[i] as number) - offset) * gain);
  }
}
