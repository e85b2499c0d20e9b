import { describe, expect, it } from "vitest";
import {
  butterworthBandpass,
  butterworthLowpass,
  type Section,
} from "#app/engine/math/butterworth.ts";
import { readFixture } from "../../../tests/support/read-fixture.ts";

interface Reference {
  cases: { fs: number; fc: number; order: number; b: number[]; a: number[]; sos: number[][] }[];
  band_pass: { fs: number; low: number; high: number; order: number; b: number[]; a: number[] };
  two_pass: { order: number; fs: number; fc: number; effective_minus3dB_Hz: number }[];
}
const reference = readFixture<Reference>("zero-phase-filter", "scipy.json");

describe("Butterworth sections against scipy.signal.butter, 1e-13 of the largest coefficient", () => {
  it.each(reference.cases)(
    "low-pass of order $order, $fc Hz at $fs Hz",
    ({ fs, fc, order, b, a }) => {
      const sections = butterworthLowpass(order, fc, fs);
      expect(sections).toHaveLength(Math.ceil(order / 2));
      expectClose(numerator(sections), b, 1e-13);
      expectClose(denominator(sections), a, 1e-13);
    },
  );

  it("band-pass of order 2, 20 to 450 Hz at 2000 Hz", () => {
    const { order, low, high, fs, a, b } = reference.band_pass;
    const sections = butterworthBandpass(order, low, high, fs);
    expect(sections).toHaveLength(2);
    expectClose(numerator(sections), b, 1e-13);
    expectClose(denominator(sections), a, 1e-13);
  });
});

describe("gain of the design", () => {
  it.each([1, 2, 3, 4, 5, 6, 7, 8])("is 1 at 0 Hz and −3 dB at the cut-off, order %i", (order) => {
    const sections = butterworthLowpass(order, 37, 1000);
    expect(gainAt(sections, 0, 1000)).toBeCloseTo(1, 12);
    expect(gainAt(sections, 37, 1000)).toBeCloseTo(Math.SQRT1_2, 12);
  });

  it("of two passes is −3 dB at the lower frequency that screens state (16.05 Hz for 20 Hz, order 2)", () => {
    for (const { order, fs, fc, effective_minus3dB_Hz: hz } of reference.two_pass) {
      expect(gainAt(butterworthLowpass(order, fc, fs), hz, fs) ** 2).toBeCloseTo(Math.SQRT1_2, 10);
    }
    expect(reference.two_pass[1]?.effective_minus3dB_Hz).toBeCloseTo(16.05, 2);
  });

  it.each([1, 2, 3, 4, 5])(
    "of a band-pass of order %i is −3 dB at both edges and 0 at 0 Hz",
    (order) => {
      const sections = butterworthBandpass(order, 20, 450, 2000);
      expect(sections).toHaveLength(order);
      expect(gainAt(sections, 20, 2000)).toBeCloseTo(Math.SQRT1_2, 11);
      expect(gainAt(sections, 450, 2000)).toBeCloseTo(Math.SQRT1_2, 11);
      expect(gainAt(sections, 0, 2000)).toBeCloseTo(0, 15);
    },
  );

  it("of a narrow band-pass, whose poles are all complex, is −3 dB at both edges too", () => {
    const sections = butterworthBandpass(3, 49, 51, 1000);
    expect(gainAt(sections, 49, 1000)).toBeCloseTo(Math.SQRT1_2, 9);
    expect(gainAt(sections, 51, 1000)).toBeCloseTo(Math.SQRT1_2, 9);
  });
});

describe("what cannot be designed", () => {
  it("is a cut-off at or over half the rate, at or below 0, or no number", () => {
    for (const hz of [500, 501, 0, -1, Number.NaN]) {
      expect(() => butterworthLowpass(2, hz, 1000)).toThrow(RangeError);
      expect(() => butterworthBandpass(2, 20, hz, 1000)).toThrow(RangeError);
    }
  });

  it("is an order that is no whole number from 1, or a band without width", () => {
    expect(() => butterworthLowpass(0, 20, 1000)).toThrow(RangeError);
    expect(() => butterworthLowpass(1.5, 20, 1000)).toThrow(RangeError);
    expect(() => butterworthBandpass(2, 20, 20, 1000)).toThrow(RangeError);
  });
});

function product(factors: number[][], length: number): number[] {
  let result = [1];
  for (const factor of factors) {
    const next = new Array<number>(result.length + factor.length - 1).fill(0);
    result.forEach((x, i) => {
      factor.forEach((y, j) => {
        next[i + j] = (next[i + j] ?? 0) + x * y;
      });
    });
    result = next;
  }
  return result.slice(0, length);
}

function poles(sections: Section[]): number {
  return sections.reduce((sum, { a2 }) => sum + (a2 === 0 ? 1 : 2), 0);
}

function numerator(sections: Section[]): number[] {
  return product(
    sections.map(({ b0, b1, b2 }) => [b0, b1, b2]),
    poles(sections) + 1,
  );
}

function denominator(sections: Section[]): number[] {
  return product(
    sections.map(({ a1, a2 }) => [1, a1, a2]),
    poles(sections) + 1,
  );
}

function expectClose(actual: number[], expected: number[], tolerance: number): void {
  expect(actual).toHaveLength(expected.length);
  const largest = Math.max(...expected.map(Math.abs));
  const worst = Math.max(
    ...actual.map((value, i) => Math.abs(value - (expected[i] ?? Number.NaN))),
  );
  expect(worst).toBeLessThanOrEqual(tolerance * largest);
}

function gainAt(sections: Section[], hz: number, rateHz: number): number {
  const w = (2 * Math.PI * hz) / rateHz;
  const size = (c0: number, c1: number, c2: number) =>
    Math.hypot(
      c0 + c1 * Math.cos(w) + c2 * Math.cos(2 * w),
      c1 * Math.sin(w) + c2 * Math.sin(2 * w),
    );
  return sections.reduce(
    (gain, { b0, b1, b2, a1, a2 }) => (gain * size(b0, b1, b2)) / size(1, a1, a2),
    1,
  );
}
