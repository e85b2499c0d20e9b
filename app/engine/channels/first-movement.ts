import type { Signals } from "#app/engine/types.ts";

export interface FirstMovement {
  /** The word for the direction in which the joint moved. */
  direction: string;
  /** When the angle left its level, in the file's own time, s. */
  atS: number;
  /** Unsigned. */
  amplitudeDeg: number;
  /**
   * 1 where torque rises with the angle, as it does against a spring; −1 where it falls, so that K
   * would come out negative: the torque's sign is wrong; 0 where torque tells neither.
   */
  torqueSign: 1 | -1 | 0;
}

const LEVEL_S = 0.1;
/** The level before is taken anew this often: a running median of each sample would be slow. */
const BLOCK_S = 0.01;
const FOLLOWED_S = 0.3;
const EXCURSION_SHARE = 0.2;
const LEFT_LEVEL_SHARE = 0.05;
/** |correlation| of torque with angle under which torque's sign is not told. */
const FAINT_CORRELATION = 0.3;

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
          torqueSign: signOfRelation(
            angle.subarray(onset, stop),
            axis.torqueNm.subarray(onset, stop),
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

/** Sign of the correlation of x and y over the samples that both have. */
function signOfRelation(x: Float64Array, y: Float64Array): 1 | -1 | 0 {
  const pairs = Array.from(x, (value, i) => [value, y[i] as number] as const).filter(
    ([a, b]) => !Number.isNaN(a) && !Number.isNaN(b),
  );
  const n = pairs.length;
  const meanX = pairs.reduce((sum, [a]) => sum + a, 0) / n;
  const meanY = pairs.reduce((sum, [, b]) => sum + b, 0) / n;
  let xx = 0;
  let yy = 0;
  let xy = 0;
  for (const [a, b] of pairs) {
    xx += (a - meanX) ** 2;
    yy += (b - meanY) ** 2;
    xy += (a - meanX) * (b - meanY);
  }
  const correlation = xy / Math.sqrt(xx * yy);
  if (!(Math.abs(correlation) >= FAINT_CORRELATION)) return 0;
  return correlation > 0 ? 1 : -1;
}
