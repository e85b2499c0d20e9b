import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { roundTicks, spread, threeTicks, tickLabels } from "./ticks.ts";

describe("three round ticks on a small axis", () => {
  it("takes those that lie in the range", () => {
    expect(threeTicks(-0.3, 4.3).ticks).toEqual([0, 2, 4]);
    expect(threeTicks(-9, 134).ticks).toEqual([0, 50, 100]);
    expect(threeTicks(0.15, 0.75).ticks).toEqual([0.2, 0.4, 0.6]);
  });

  it("stands zero in the middle of a residual's axis", () => {
    expect(threeTicks(-0.021, 0.021).ticks).toEqual([-0.02, 0, 0.02]);
  });

  it("always gives three, evenly spaced, in a range that holds what it was given", () => {
    fc.assert(
      fc.property(
        fc.double({ min: -1e4, max: 1e4, noNaN: true }),
        fc.double({ min: 1e-4, max: 1e4, noNaN: true }),
        (low, span) => {
          const range = threeTicks(low, low + span);
          expect(range.ticks).toHaveLength(3);
          const [a, b, c] = range.ticks as [number, number, number];
          expect(c - b).toBeCloseTo(b - a, 6);
          expect(range.low).toBeLessThanOrEqual(low);
          expect(range.high).toBeGreaterThanOrEqual(low + span);
          expect(range.high - range.low).toBeLessThanOrEqual(2.6 * span);
          if (range.low < 0 && range.high > 0) expect(range.ticks).toContain(0);
        },
      ),
    );
  });

  it("copes with a channel that never moves", () => {
    expect(threeTicks(0, 0).ticks).toHaveLength(3);
    expect(threeTicks(12, 12).ticks).toEqual([5, 10, 15]);
  });
});

describe("round ticks on an axis with room", () => {
  it("gives four to seven", () => {
    fc.assert(
      fc.property(
        fc.double({ min: -1e4, max: 1e4, noNaN: true }),
        fc.double({ min: 1e-3, max: 1e4, noNaN: true }),
        (low, span) => {
          const count = roundTicks(low, low + span).length;
          expect(count).toBeGreaterThanOrEqual(3);
          expect(count).toBeLessThanOrEqual(7);
        },
      ),
    );
    expect(roundTicks(-120, 220)).toEqual([-100, -50, 0, 50, 100, 150, 200]);
  });
});

describe("how ticks are written", () => {
  it("gives all the same decimals and a true minus", () => {
    expect(tickLabels([-0.5, 0, 0.5])).toEqual(["−0.5", "0", "0.5"]);
    expect(tickLabels([0, 50, 100])).toEqual(["0", "50", "100"]);
    expect(tickLabels([0, 0.0000002])).toEqual(["0", "0.0000002"]);
  });
});

describe("the range of what is drawn", () => {
  it("passes over missing samples", () => {
    const range = spread([Float64Array.from([Number.NaN, 0, 1])]);
    expect(range?.[0]).toBeCloseTo(-0.07);
    expect(range?.[1]).toBeCloseTo(1.07);
  });

  it("is not there without a sample", () => {
    expect(spread([Float64Array.from([Number.NaN])])).toBeNull();
  });
});
