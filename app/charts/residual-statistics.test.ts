import { describe, expect, it } from "vitest";
import { autocorrelation, binsOf } from "./residual-statistics.ts";

describe("bins of a residual", () => {
  it("hold every value, and zero in the middle one", () => {
    const bins = binsOf([Float64Array.from([-2, -1, 0, 0, 0, 1, 2, Number.NaN])]);
    expect(bins.reduce((sum, bin) => sum + bin.count, 0)).toBe(7);
    const middle = bins[(bins.length - 1) / 2];
    expect(middle?.low).toBeLessThan(0);
    expect(middle?.high).toBeGreaterThan(0);
    expect(bins.at(-1)?.high).toBeCloseTo(2);
  });

  it("are none where nothing is left over", () => {
    expect(binsOf([new Float64Array(5)])).toEqual([]);
  });
});

describe("autocorrelation of residuals", () => {
  it("begins at 1 and alternates for values that do", () => {
    const [zero, one, two] = autocorrelation([Float64Array.from([1, -1, 1, -1])], 2);
    expect([zero, one, two]).toEqual([1, -0.75, 0.5]);
  });

  it("never multiplies across windows", () => {
    const apart = autocorrelation([Float64Array.from([1, -1]), Float64Array.from([1, -1])], 5);
    expect(apart).toEqual([1, -0.5]);
  });

  it("is nothing without a residual", () => {
    expect(autocorrelation([new Float64Array(3)], 5)).toEqual([]);
  });
});
