import { formatDigits, formatNumber } from "#app/domain/quantity.ts";
import type { AxisMovement } from "#app/engine/types.ts";
import type { Sign } from "./map-draft.ts";

/** What the torque says of K, with the signs as they are now. */
export type StiffnessSign = "positive" | "negative" | "unclear";

export interface MovementInWords {
  /** "First movement: at 1.24 s, 4.0° towards extension." */
  text: string;
  /** What the torque does, and what that means for K. */
  torque: string;
  stiffness: StiffnessSign;
  /** The name of the other direction; null where nothing moved. */
  otherWay: string | null;
}

/** @param movement  read with every sign as recorded */
export function stiffnessSign(
  movement: AxisMovement,
  signs: { angle: Sign; torque: Sign },
): StiffnessSign {
  if (movement.status === "still" || movement.torqueSign === 0) return "unclear";
  const turns = signs.angle * signs.torque;
  return movement.torqueSign * turns > 0 ? "positive" : "negative";
}

/**
 * The first movement about an axis as the person is asked about it.
 *
 * @param movement  read with every sign as recorded
 * @param axis  the study's, with the names of its directions
 * @param signs  of angle and torque for the tested side
 */
export function describeMovement(
  movement: AxisMovement,
  axis: { label: string; positive: string; negative: string },
  signs: { angle: Sign; torque: Sign },
): MovementInWords {
  if (movement.status === "still") {
    return {
      text: "No movement was found.",
      torque: `Nothing turned about ${axis.label} in this file, so the signs cannot be seen in it.`,
      stiffness: "unclear",
      otherWay: null,
    };
  }
  const stiffness = stiffnessSign(movement, signs);
  const isPositive = movement.amplitudeDeg * signs.angle >= 0;
  const size = formatDigits(Math.abs(movement.amplitudeDeg), 2);
  return {
    text: `First movement: at ${formatNumber(movement.onsetS, 2)} s, ${size}° towards ${
      isPositive ? axis.positive : axis.negative
    }.`,
    torque: TORQUE_IN_WORDS[stiffness],
    stiffness,
    otherWay: isPositive ? axis.negative : axis.positive,
  };
}

const TORQUE_IN_WORDS: Record<StiffnessSign, string> = {
  positive: "The torque rises with it: a spring gives K > 0.",
  negative: "The torque falls as the angle grows: K would be negative, which no passive limb has.",
  unclear:
    "The torque goes neither with the angle nor against it: look whether its column is right.",
};
