import type { Section } from "#app/engine/math/butterworth.ts";

/** Length of the reflection at each end for zero-phase filtering: round(3 · rate / cut-off), at most n − 1. */
export function padSamples(rateHz: number, cutoffHz: number, n: number): number {
  return Math.max(0, Math.min(Math.round((3 * rateHz) / cutoffHz), n - 1));
}

/** Filters once, forwards, from rest. A new array as long as `x`. */
export function filterForward(sections: readonly Section[], x: Float64Array): Float64Array {
  const y = Float64Array.from(x);
  for (const section of sections) runSection(section, y, 0, 0);
  return y;
}

/**
 * Filters forwards and backwards. The signal is continued at both ends by its odd reflection, and
 * each pass starts in the steady state for its first value (Gustafsson 1996, IEEE Trans. Signal
 * Process. 44:988, discusses the choice; this is the plain one).
 *
 * @param padSamples  length of the reflection, at most x.length − 1
 * @returns a new array as long as `x`
 * @throws RangeError where the reflection is longer than the signal allows
 */
export function filterZeroPhase(
  sections: readonly Section[],
  x: Float64Array,
  padSamples: number,
): Float64Array {
  const n = x.length;
  if (n === 0) return new Float64Array(0);
  if (!Number.isInteger(padSamples) || padSamples < 0 || padSamples > n - 1) {
    throw new RangeError(`reflection of ${padSamples} samples for a signal of ${n}`);
  }
  const y = reflectOdd(x, padSamples);
  runSteady(sections, y);
  y.reverse();
  runSteady(sections, y);
  y.reverse();
  return y.slice(padSamples, padSamples + n);
}

function reflectOdd(x: Float64Array, pad: number): Float64Array {
  const n = x.length;
  const y = new Float64Array(n + 2 * pad);
  const first = 2 * (x[0] as number);
  const last = 2 * (x[n - 1] as number);
  for (let i = 0; i < pad; i++) {
    y[i] = first - (x[pad - i] as number);
    y[pad + n + i] = last - (x[n - 2 - i] as number);
  }
  y.set(x, pad);
  return y;
}

/** All sections in place, each from the state it would have if its first input had always stood there. */
function runSteady(sections: readonly Section[], y: Float64Array): void {
  for (const section of sections) {
    const { b0, b1, b2, a1, a2 } = section;
    const first = y[0] as number;
    const gain = (b0 + b1 + b2) / (1 + a1 + a2);
    runSection(section, y, (gain - b0) * first, (b2 - a2 * gain) * first);
  }
}

/** One section in place, transposed direct form II. */
function runSection(section: Section, y: Float64Array, state1: number, state2: number): void {
  const { b0, b1, b2, a1, a2 } = section;
  let s1 = state1;
  let s2 = state2;
  for (let i = 0; i < y.length; i++) {
    const input = y[i] as number;
    const output = b0 * input + s1;
    s1 = b1 * input - a1 * output + s2;
    s2 = b2 * input - a2 * output;
    y[i] = output;
  }
}
