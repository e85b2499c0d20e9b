import { mean, sampleSd } from "#app/engine/math/moments.ts";
import type { Signals } from "#app/engine/types.ts";

export interface FirstMovement {
  /** The word for the direction in which the joint moved. */
  direction: string;
  /** When the angle left its level, in the file's own time, s. */
  atS: number;
  /** Unsigned. */
  amplitudeDeg: number;
  /**
   * 1 where the torque of the joint at rest rises with the angle, as it does against a spring; −1
   * where it falls, so that K would come out negative: the torque's sign is wrong; 0 where torque
   * tells neither.
   */
  torqueSign: 1 | -1 | 0;
}

const LEVEL_S = 0.1;
/** The level before is taken anew this often: a running median of each sample would be slow. */
const BLOCK_S = 0.01;
const FOLLOWED_S = 0.3;
const EXCURSION_SHARE = 0.2;
const LEFT_LEVEL_SHARE = 0.05;
/** The joint is held where its angle stays over this share of the movement. */
const HELD_SHARE = 0.8;
/** Before the movement, clear of its foot: there inertia works before the angle shows it. */
const QUIET_S = [0.15, 0.05] as const;
const LEAST_HELD_S = 0.02;
/** A change of torque of so many SD of the torque before is told from noise. */
const TOLD_SDS = 2;

/**
 * The first clear movement about an axis, for the person who confirms signs at take-in: where the
 * angle first departs from the median of the 100 ms before by over 20 % of its range.
 *
 * @param positive  word for growing angles, `negative` for falling ones
 * @returns null where nothing moves like that
 */
export function firstMovement(
  signals: Signals,
  axisName: string,
  positive: string,
  negative: string,
): FirstMovement | null {
  const axis = signals.axes.find(({ name }) => name === axisName);
  if (axis === undefined) throw new RangeError(`there is no axis ${axisName}`);
  const angle = axis.angle.si;
  const range = rangeOf(angle);
  if (!(range > 0)) return null;
  const span = (seconds: number): number => Math.max(1, Math.round(seconds * signals.rateHz));
  const before = span(LEVEL_S);
  const block = span(BLOCK_S);
  for (const { start, end } of signals.segments) {
    for (let from = start + before; from < end; from += block) {
      const level = medianOf(angle.subarray(from - before, from));
      for (let i = from; i < Math.min(from + block, end); i++) {
        if (!(Math.abs((angle[i] as number) - level) > EXCURSION_SHARE * range)) continue;
        const stop = Math.min(end, i + span(FOLLOWED_S));
        const sign = Math.sign((angle[i] as number) - level);
        let peak = 0;
        for (let k = i; k < stop; k++) {
          peak = Math.max(peak, sign * ((angle[k] as number) - level) || 0);
        }
        let onset = i;
        while (
          onset > from - before &&
          Math.abs((angle[onset - 1] as number) - level) > LEFT_LEVEL_SHARE * peak
        ) {
          onset--;
        }
        return {
          direction: sign > 0 ? positive : negative,
          atS: signals.timeS[onset] as number,
          amplitudeDeg: (peak * 180) / Math.PI,
          torqueSign: signAtRest(
            axis.torqueNm.subarray(
              Math.max(start, onset - span(QUIET_S[0])),
              Math.max(start, onset - span(QUIET_S[1])),
            ),
            heldTorque(angle, axis.torqueNm, i, stop, level + HELD_SHARE * sign * peak, sign),
            span(LEAST_HELD_S),
            sign,
          ),
        };
      }
    }
  }
  return null;
}

function rangeOf(values: Float64Array): number {
  let least = Number.POSITIVE_INFINITY;
  let most = Number.NEGATIVE_INFINITY;
  for (const value of values) {
    if (value < least) least = value;
    if (value > most) most = value;
  }
  return most - least;
}

/** NaN where half of the values or more are missing. */
function medianOf(values: Float64Array): number {
  return values.slice().sort()[values.length >> 1] as number; // NaN sorts last
}

/** Torque where the joint is held beyond `bound`: the later half, when the movement itself is over. */
function heldTorque(
  angle: Float64Array,
  torque: Float64Array,
  from: number,
  to: number,
  bound: number,
  sign: number,
): Float64Array {
  const held: number[] = [];
  for (let i = from; i < to; i++) {
    if (sign * (angle[i] as number) >= sign * bound) held.push(torque[i] as number);
  }
  return Float64Array.from(held.slice(held.length >> 1));
}

/**
 * Whether the torque at rest rose with the angle. Only at rest: in a fast movement a limb's inertia
 * outweighs a soft spring many times over, and as the movement slows it pulls the other way.
 */
function signAtRest(
  before: Float64Array,
  held: Float64Array,
  least: number,
  sign: number,
): 1 | -1 | 0 {
  const known = [before, held].map((torque) => torque.filter((value) => !Number.isNaN(value)));
  const [first, second] = known as [Float64Array, Float64Array];
  if (first.length < least || second.length < least) return 0;
  const change = mean(second) - mean(first);
  if (!(Math.abs(change) > Math.max(TOLD_SDS * sampleSd(first), Number.EPSILON))) return 0;
  return change * sign > 0 ? 1 : -1;
}
