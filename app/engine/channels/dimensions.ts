import { EngineError } from "#app/engine/errors.ts";
import { type Dimension, dimensionOf, unitsOf } from "#app/engine/math/units.ts";
import type { Protocol, Unit } from "#app/engine/types.ts";

const WORDS: Record<Dimension, string> = {
  angle: "an angle",
  torque: "a torque",
  time: "a time",
  voltage: "a voltage",
  force: "a force",
  length: "a length",
  pressure: "a pressure",
  number: "a number",
};

/**
 * Whether each unit of a protocol measures what its field is for: an angle in N.m is none.
 *
 * @throws EngineError "protocol" with the dotted field
 */
export function checkDimensions(protocol: Protocol): void {
  const { time, axes, emg } = protocol;
  if ("unit" in time) check(time.unit, "time.unit", "time");
  axes.forEach((axis, i) => {
    check(axis.angle.unit, `axes.${i}.angle.unit`, "angle");
    if (axis.torque) check(axis.torque.unit, `axes.${i}.torque.unit`, "torque");
    if (axis.limb_angle) check(axis.limb_angle.unit, `axes.${i}.limb_angle.unit`, "angle");
    if (axis.torque_from) {
      const { force_unit, moment_unit } = axis.torque_from.force_plate;
      check(force_unit, `axes.${i}.torque_from.force_plate.force_unit`, "force");
      check(moment_unit, `axes.${i}.torque_from.force_plate.moment_unit`, "torque");
    }
  });
  emg.forEach((channel, i) => {
    // A reference is a level in V; without one a channel may be normalised already.
    if (channel.reference !== undefined) check(channel.unit, `emg.${i}.unit`, "voltage");
    else check(channel.unit, `emg.${i}.unit`, "voltage", "number");
  });
}

function check(unit: Unit, field: string, ...allowed: Dimension[]): void {
  if (allowed.includes(dimensionOf(unit))) return;
  throw new EngineError(
    "protocol",
    `The unit "${unit}" is not that of ${allowed.map((d) => WORDS[d]).join(" or ")}; use ${allowed.flatMap(unitsOf).join(", ")}.`,
    { field },
  );
}
