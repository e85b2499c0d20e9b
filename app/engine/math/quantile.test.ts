import { describe, expect, it } from "vitest";
import { median, quantile } from "#app/engine/math/quantile.ts";

describe("quantile, type 7", () => {
  // numpy 2.4.6: np.quantile([1, 3, 4, 8, 20], …), whose default is type 7.
  it.each([
    [0, 1],
    [0.025, 1.2],
    [0.1, 1.8],
    [0.25, 3],
    [0.5, 4],
    [0.9, 15.2],
    [0.975, 18.8],
    [1, 20],
  ])("interpolates linearly between order statistics at %d", (probability, expected) => {
    expect(quantile([1, 3, 4, 8, 20], probability)).toBeCloseTo(expected, 12);
  });

  it("of one value is that value", () => {
    expect(quantile([5], 0.3)).toBe(5);
  });

  it("refuses no values and a probability outside of 0 and 1", () => {
    expect(() => quantile([], 0.5)).toThrow(RangeError);
    expect(() => quantile([1], 1.1)).toThrow(RangeError);
    expect(() => quantile([1], Number.NaN)).toThrow(RangeError);
  });
});

describe("median", () => {
  it("sorts by size, not by text, and leaves its input as it is", () => {
    const values = [10, 9, 2, 33];
    expect(median(values)).toBe(9.5);
    expect(median([3, -1, 100])).toBe(3);
    expect(values).toEqual([10, 9, 2, 33]);
  });
});
