import type { Section } from "#app/engine/math/butterworth.ts";

/** Length of the reflection at each end for zero-phase filtering: round(3 · rate / cut-off), at most n − 1. */
export function padSamples(rateHz: number, cutoffHz: number, n: number): number {
  return Math.max(0, Math.min(Math.round((3 * rateHz) / cutoffHz), n - 1));
}

/** Filters once, forwards, from rest. A new array as long as `x`. */
export function filterForward(sections: readonly Section[], x: Float64Array): Float64Array {
  const y = Float64Array.from(x);
  for (const section of sections) runSection(section, y, new Float64Array(2), false);
  return y;
}

/**
 * Filters forwards and backwards. The signal is continued at both ends by its odd reflection, and
 * each pass starts in the steady state for its first value (Gustafsson 1996, IEEE Trans. Signal
 * Process. 44:988, discusses the choice; this is the plain one).
 *
 * @param padSamples  length of the reflection, at most x.length − 1
 * @param y  where the result goes, as long as `x`; a new array if left out
 * @returns `y`
 * @throws RangeError where the reflection is longer than the signal allows
 */
export function filterZeroPhase(
  sections: readonly Section[],
  x: Float64Array,
  padSamples: number,
  y: Float64Array = new Float64Array(x.length),
): Float64Array {
  const n = x.length;
  if (n === 0) return y;
  if (!Number.isInteger(padSamples) || padSamples < 0 || padSamples > n - 1) {
    throw new RangeError(`reflection of ${padSamples} samples for a signal of ${n}`);
  }
  const before = new Float64Array(padSamples);
  const behind = new Float64Array(padSamples);
  for (let i = 0; i < padSamples; i++) {
    before[i] = 2 * (x[0] as number) - (x[padSamples - i] as number);
    behind[i] = 2 * (x[n - 1] as number) - (x[n - 2 - i] as number);
  }
  y.set(x);
  // The three parts are run through as if they were one array: an hour's recording is not copied.
  for (const section of sections) runSteady(section, [before, y, behind], false);
  for (const section of sections) runSteady(section, [behind, y, before], true);
  return y;
}

/** One section through all parts in place, from the state it would have if its first input had always stood there. */
function runSteady(section: Section, parts: readonly Float64Array[], backwards: boolean): void {
  const { b0, b1, b2, a1, a2 } = section;
  const part = parts.find(({ length }) => length > 0);
  const first = (backwards ? part?.at(-1) : part?.[0]) ?? 0;
  const gain = (b0 + b1 + b2) / (1 + a1 + a2);
  const state = Float64Array.of((gain - b0) * first, (b2 - a2 * gain) * first);
  for (const each of parts) runSection(section, each, state, backwards);
}

/** One section in place, transposed direct form II; the state is taken up and left for what follows. */
function runSection(
  { b0, b1, b2, a1, a2 }: Section,
  y: Float64Array,
  state: Float64Array,
  backwards: boolean,
): void {
  let s1 = state[0] as number;
  let s2 = state[1] as number;
  const step = backwards ? -1 : 1;
  const end = backwards ? -1 : y.length;
  for (let i = backwards ? y.length - 1 : 0; i !== end; i += step) {
    const input = y[i] as number;
    const output = b0 * input + s1;
    s1 = b1 * input - a1 * output + s2;
    s2 = b2 * input - a2 * output;
    y[i] = output;
  }
  state[0] = s1;
  state[1] = s2;
}
