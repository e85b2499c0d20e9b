import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { butterworthBandpass, butterworthLowpass } from "#app/engine/math/butterworth.ts";
import { filterForward, filterZeroPhase, padSamples } from "#app/engine/math/filter.ts";
import { readFixture } from "../../../tests/support/read-fixture.ts";

interface ExactCase {
  fs: number;
  fc: number;
  order: number;
  padlen: number;
  x: number[];
  y_exact: number[];
}
interface Band {
  fs: number;
  low: number;
  high: number;
  order: number;
  padlen: number;
  x: number[];
}
const scipy = readFixture<{
  cases: ExactCase[];
  reflection_lengths: (Omit<ExactCase, "y_exact"> & { y_filtfilt: number[] })[];
  band_pass: Band & { y_filtfilt: number[] };
  band_passes_once: (Band & { y_sosfilt: number[] })[];
}>("zero-phase-filter", "scipy.json");
const rule = readFixture<{ cases: ExactCase[] }>("zero-phase-filter", "padding-rule.json");

describe("zero-phase filtering against the same filter in 50 digits, 1e-12 of max |y|", () => {
  it.each(scipy.cases)("order $order, $fc Hz at $fs Hz, reflection of $padlen", (each) => {
    const sections = butterworthLowpass(each.order, each.fc, each.fs);
    const y = filterZeroPhase(sections, Float64Array.from(each.x), each.padlen);
    expect(worstShare(y, each.y_exact)).toBeLessThanOrEqual(1e-12);
  });

  it.each(rule.cases)("order $order, $fc Hz at $fs Hz, reflection by the rule: $padlen", (each) => {
    const pad = padSamples(each.fs, each.fc, each.x.length);
    expect(pad).toBe(each.padlen);
    const sections = butterworthLowpass(each.order, each.fc, each.fs);
    const y = filterZeroPhase(sections, Float64Array.from(each.x), pad);
    expect(worstShare(y, each.y_exact)).toBeLessThanOrEqual(1e-12);
  });
});

describe("filtering against scipy", () => {
  it.each(scipy.reflection_lengths)("filtfilt with an odd reflection of $padlen, 1e-11", (each) => {
    const sections = butterworthLowpass(each.order, each.fc, each.fs);
    const y = filterZeroPhase(sections, Float64Array.from(each.x), each.padlen);
    expect(worstShare(y, each.y_filtfilt)).toBeLessThanOrEqual(1e-11);
  });

  it("filtfilt of a band-pass, 1e-11", () => {
    const { order, low, high, fs, x, padlen, y_filtfilt } = scipy.band_pass;
    const y = filterZeroPhase(
      butterworthBandpass(order, low, high, fs),
      Float64Array.from(x),
      padlen,
    );
    expect(worstShare(y, y_filtfilt)).toBeLessThanOrEqual(1e-11);
  });

  it.each(scipy.band_passes_once)("sosfilt of a band-pass of order $order, once, 1e-12", (each) => {
    const sections = butterworthBandpass(each.order, each.low, each.high, each.fs);
    const y = filterForward(sections, Float64Array.from(each.x));
    expect(worstShare(y, each.y_sosfilt)).toBeLessThanOrEqual(1e-12);
  });
});

describe("length of the reflection", () => {
  it("is three periods of the cut-off, and at most the signal less one sample", () => {
    expect(padSamples(1000, 20, 10_000)).toBe(150);
    expect(padSamples(1000, 20, 100)).toBe(99);
    expect(padSamples(1000, 7, 10_000)).toBe(429);
    expect(padSamples(1000, 20, 1)).toBe(0);
  });

  it("is refused where it is longer than the signal allows", () => {
    expect(() => filterZeroPhase(butterworthLowpass(2, 20, 1000), new Float64Array(5), 5)).toThrow(
      RangeError,
    );
  });
});

describe("zero-phase filtering as such", () => {
  const signal = fc.array(fc.double({ min: -1, max: 1, noNaN: true }), {
    minLength: 30,
    maxLength: 80,
  });
  const design = fc.record({
    order: fc.integer({ min: 1, max: 8 }),
    cutoffHz: fc.double({ min: 20, max: 450, noNaN: true }),
  });

  it("is linear", () => {
    fc.assert(
      fc.property(
        signal,
        signal,
        fc.double({ min: -5, max: 5, noNaN: true }),
        design,
        (p, q, k, d) => {
          const n = Math.min(p.length, q.length);
          const sum = Float64Array.from({ length: n }, (_, i) => (p[i] ?? 0) + k * (q[i] ?? 0));
          const [yp, yq, ySum] = [p.slice(0, n), q.slice(0, n), sum].map((x) => filtered(x, d));
          for (let i = 0; i < n; i++) {
            expect(ySum?.[i]).toBeCloseTo((yp?.[i] ?? 0) + k * (yq?.[i] ?? 0), 10);
          }
        },
      ),
      { numRuns: 60, seed: 1 },
    );
  });

  it("leaves a constant as it is", () => {
    fc.assert(
      fc.property(fc.double({ min: -3, max: 3, noNaN: true }), design, (level, d) => {
        for (const value of filtered(new Float64Array(60).fill(level), d)) {
          expect(value).toBeCloseTo(level, 9);
        }
      }),
      { numRuns: 40, seed: 2 },
    );
  });

  // With a reflection at both ends the two passes differ only in which comes first. Over a signal
  // that rests long enough at both ends neither sees the other's start.
  it("of the reversed signal is the reversed of the filtered one", () => {
    fc.assert(
      fc.property(signal, design, (values, { order, cutoffHz }) => {
        const d = { order: Math.min(order, 4), cutoffHz };
        const rest = new Array<number>(400).fill(0);
        const x = Float64Array.from([...rest, ...values, ...rest]);
        const forwards = filtered(x, d);
        const backwards = filtered(x.toReversed(), d).reverse();
        for (let i = 0; i < x.length; i++) {
          expect(backwards[i]).toBeCloseTo(forwards[i] ?? Number.NaN, 9);
        }
      }),
      { numRuns: 40, seed: 3 },
    );
  });

  it("does not change its input", () => {
    const x = Float64Array.from({ length: 40 }, (_, i) => Math.sin(i));
    const copy = x.slice();
    filtered(x, { order: 2, cutoffHz: 50 });
    filterForward(butterworthLowpass(2, 50, 1000), x);
    expect(x).toEqual(copy);
  });

  it("of a lone sample is that sample, of none is none", () => {
    const sections = butterworthLowpass(2, 20, 1000);
    expect(filterZeroPhase(sections, Float64Array.of(4.25), 0)[0]).toBeCloseTo(4.25, 12);
    expect(filterZeroPhase(sections, new Float64Array(0), 0)).toHaveLength(0);
  });
});

function filtered(
  x: ArrayLike<number>,
  { order, cutoffHz }: { order: number; cutoffHz: number },
): Float64Array {
  const sections = butterworthLowpass(order, cutoffHz, 1000);
  return filterZeroPhase(sections, Float64Array.from(x), padSamples(1000, cutoffHz, x.length));
}

function worstShare(actual: Float64Array, expected: number[]): number {
  expect(actual).toHaveLength(expected.length);
  const largest = Math.max(...expected.map(Math.abs));
  return (
    Math.max(...expected.map((value, i) => Math.abs((actual[i] ?? Number.NaN) - value))) / largest
  );
}
