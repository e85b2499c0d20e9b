import fc from "fast-check";
import { describe, expect, it } from "vitest";
import {
  lag1Autocorrelation,
  mean,
  rms,
  sampleSd,
  sumOfSquares,
  sumOfSquaresAboutMean,
  variance,
} from "#app/engine/math/moments.ts";

const x = [2, 4, 4, 4, 5, 5, 7, 9];

describe("moments", () => {
  it("of eight numbers whose mean is 5 and whose squared deviations add up to 32", () => {
    expect(mean(x)).toBe(5);
    expect(sumOfSquaresAboutMean(x)).toBe(32);
    expect(variance(x)).toBe(4);
    expect(sampleSd(x)).toBe(Math.sqrt(32 / 7));
    expect(sumOfSquares(x)).toBe(232);
    expect(rms(x)).toBe(Math.sqrt(29));
  });

  it("are taken over the samples asked for", () => {
    expect(mean(x, 1, 4)).toBe(4);
    expect(sampleSd(x, 1, 4)).toBe(0);
    expect(rms([3, 4, 100], 0, 2)).toBe(Math.sqrt(12.5));
    expect(lag1Autocorrelation([50, 1, -1, 1, -1], 1, 5)).toBe(-0.75);
  });

  it("keep their digits under a large offset", () => {
    const level = 1e9;
    const values = [level + 4, level + 7, level + 13, level + 16];
    expect(variance(values)).toBe(22.5);
  });

  it("are NaN where they are not defined", () => {
    expect(mean([])).toBeNaN();
    expect(sampleSd([1])).toBeNaN();
  });
});

describe("lag-1 autocorrelation", () => {
  // Mean 3; deviations −2 −1 0 1 2; products 2 + 0 + 0 + 2; squares 10.
  it("of a rising line of five is 0.4", () => {
    expect(lag1Autocorrelation([1, 2, 3, 4, 5])).toBeCloseTo(0.4, 15);
  });

  it("is null for fewer than two values or all the same", () => {
    expect(lag1Autocorrelation([1])).toBeNull();
    expect(lag1Autocorrelation([])).toBeNull();
    expect(lag1Autocorrelation([2, 2, 2])).toBeNull();
  });

  it("never leaves −1 … 1 and does not see an offset", () => {
    fc.assert(
      fc.property(
        fc.array(fc.integer({ min: -100, max: 100 }), { minLength: 2, maxLength: 40 }),
        fc.integer({ min: -1000, max: 1000 }),
        (values, offset) => {
          const r = lag1Autocorrelation(values);
          if (r === null) return;
          expect(Math.abs(r)).toBeLessThan(1);
          expect(lag1Autocorrelation(values.map((v) => v + offset))).toBeCloseTo(r, 9);
        },
      ),
      { numRuns: 200, seed: 6 },
    );
  });
});
