import { z } from "zod";
import { type RecordingMap, recordingMapSchema } from "./recording.ts";

/**
 * The channel map that a rig remembers from the last take-in. Left and right limbs turn opposite
 * ways on many rigs, so each channel has a sign for either tested side; null until such a limb was
 * taken in.
 */

export type TestedSide = "left" | "right";

const sign = z.literal([1, -1]).nullable();
const axisOfMap = recordingMapSchema.shape.axes.element;
const channel = axisOfMap.shape.angle.extend({
  sign: z.strictObject({ left: sign, right: sign }),
});

export const rigMapSchema = recordingMapSchema.extend({
  axes: z.array(
    axisOfMap.extend({ angle: channel, torque: channel, limb_angle: channel.optional() }),
  ),
});
export type RigMap = z.infer<typeof rigMapSchema>;
type RigChannel = z.infer<typeof channel>;
type ChannelOfMap = RecordingMap["axes"][number]["angle"];

/**
 * What the rig knows after a recording of this side. Signs of the other side stay where the column
 * is the same; axes that this recording does not have stay as they were.
 */
export function rememberMap(known: RigMap | null, map: RecordingMap, side: TestedSide): RigMap {
  const before = new Map((known?.axes ?? []).map((axis) => [axis.name, axis]));
  const axes = map.axes.map((axis) => {
    const old = before.get(axis.name);
    before.delete(axis.name);
    return {
      name: axis.name,
      angle: rememberChannel(old?.angle, axis.angle, side),
      torque: rememberChannel(old?.torque, axis.torque, side),
      ...(axis.limb_angle && {
        limb_angle: rememberChannel(old?.limb_angle, axis.limb_angle, side),
      }),
    };
  });
  return { ...map, axes: [...axes, ...before.values()] };
}

function rememberChannel(
  known: RigChannel | undefined,
  channel: ChannelOfMap,
  side: TestedSide,
): RigChannel {
  const same = known?.column === channel.column ? known.sign : { left: null, right: null };
  return { ...channel, sign: { ...same, [side]: channel.sign } };
}

/**
 * The map to propose for a recording of this side. `unsure` names the axes whose signs were never
 * seen for it: there the opposite of the other side is proposed and the person is asked.
 */
export function mapForSide(
  rig: RigMap,
  side: TestedSide,
  axisNames: readonly string[],
): { map: RecordingMap; unsure: string[] } {
  const other = side === "left" ? "right" : "left";
  const unsure: string[] = [];
  const axes = rig.axes
    .filter((axis) => axisNames.includes(axis.name))
    .map((axis) => {
      const resolve = (channel: RigChannel): ChannelOfMap => {
        const known = channel.sign[side];
        if (known === null && !unsure.includes(axis.name)) unsure.push(axis.name);
        return { ...channel, sign: known ?? (channel.sign[other] === 1 ? -1 : 1) };
      };
      return {
        name: axis.name,
        angle: resolve(axis.angle),
        torque: resolve(axis.torque),
        ...(axis.limb_angle && { limb_angle: resolve(axis.limb_angle) }),
      };
    });
  return { map: { ...rig, axes }, unsure };
}
