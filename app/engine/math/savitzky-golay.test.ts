import { describe, expect, it } from "vitest";
import { savitzkyGolayCoefficients, savitzkyGolaySmooth } from "#app/engine/math/savitzky-golay.ts";
import { readFixture } from "../../../tests/support/read-fixture.ts";

const scipy = readFixture<{
  x: number[];
  cases: { span: number; polynomial: number; coeffs: number[]; y: number[] }[];
}>("savitzky-golay", "scipy.json");

describe("Savitzky–Golay smoothing against scipy", () => {
  it.each(scipy.cases)("weights of span $span, polynomial $polynomial, 1e-13", (each) => {
    const weights = savitzkyGolayCoefficients(each.span, each.polynomial);
    expect(weights).toHaveLength(each.span);
    each.coeffs.forEach((value, i) => {
      expect(Math.abs((weights[i] ?? Number.NaN) - value)).toBeLessThan(1e-13);
    });
  });

  it.each(scipy.cases)("output of span $span, polynomial $polynomial, 1e-10 of max |y|", (each) => {
    const half = (each.span - 1) / 2;
    const y = savitzkyGolaySmooth(Float64Array.from(scipy.x), each.span, each.polynomial);
    const largest = Math.max(...each.y.map(Math.abs));
    each.y.forEach((value, i) => {
      if (i < half || i >= each.y.length - half) expect(y[i]).toBeNaN();
      else expect(Math.abs((y[i] ?? Number.NaN) - value)).toBeLessThan(1e-10 * largest);
    });
  });
});

describe("Savitzky–Golay smoothing as such", () => {
  // Savitzky & Golay 1964, table I: −3 12 17 12 −3 over 35, and −2 3 6 7 6 3 −2 over 21.
  it("has the weights of the first table", () => {
    const five = savitzkyGolayCoefficients(5, 2).map((w) => w * 35);
    expect([...five]).toEqual([-3, 12, 17, 12, -3].map((w) => expect.closeTo(w, 12)));
    const seven = savitzkyGolayCoefficients(7, 3).map((w) => w * 21);
    expect([...seven]).toEqual([-2, 3, 6, 7, 6, 3, -2].map((w) => expect.closeTo(w, 12)));
  });

  it.each([
    [21, 3],
    [101, 5],
    [1001, 4],
    [9, 8],
  ])("keeps a polynomial of its own degree: span %i, degree %i", (span, degree) => {
    const x = Float64Array.from({ length: span + 20 }, (_, i) => (i / (span + 20) - 0.4) ** degree);
    const y = savitzkyGolaySmooth(x, span, degree);
    const half = (span - 1) / 2;
    for (let i = half; i < x.length - half; i++) expect(y[i]).toBeCloseTo(x[i] ?? 0, 12);
  });

  it("gives no value where the span is longer than the signal, however long", () => {
    const y = savitzkyGolaySmooth(new Float64Array(30), 1_000_000_001, 3);
    expect(y).toEqual(new Float64Array(30).fill(Number.NaN));
  });

  it("refuses an even span and one that is not over the polynomial's degree", () => {
    for (const [span, degree] of [
      [4, 2],
      [3, 3],
      [5, 5],
      [5, -1],
      [0, 0],
      [5, 1.5],
    ] as const) {
      expect(() => savitzkyGolayCoefficients(span, degree)).toThrow(RangeError);
    }
  });
});
