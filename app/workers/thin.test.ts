import { describe, expect, it } from "vitest";
import { firstAtOrAfter, nearestSample, thinColumns, withoutMissingStamps } from "./thin.ts";

const stamps = (n: number, rateHz: number) =>
  Float64Array.from({ length: n }, (_, i) => i / rateHz);

describe("thinning for drawing", () => {
  it("keeps every sample where there are no more than four per pixel", () => {
    const column = Float64Array.from({ length: 40 }, (_, i) => i * i);
    const out = thinColumns(stamps(40, 1000), [column], { from: 10, to: 20, pixels: 10 });
    expect(out.thinned).toBe(false);
    expect(Array.from(out.columns[0] ?? [])).toEqual(Array.from(column.slice(10, 20)));
  });

  it("keeps a peak of a single sample, and its order after a trough", () => {
    const column = new Float64Array(10_000);
    column[4_321] = -3;
    column[4_322] = 7;
    const out = thinColumns(stamps(10_000, 1000), [column], { from: 0, to: 10_000, pixels: 100 });
    expect(out.thinned).toBe(true);
    expect(out.timeS.length).toBe(200);
    const values = Array.from(out.columns[0] ?? []);
    expect(values.slice(86, 88)).toEqual([-3, 7]);
    expect(Math.max(...values)).toBe(7);
    expect(out.timeS[86]).toBeCloseTo(4.3, 2);
  });

  it("leaves a stretch of missing samples empty, and one missing sample without a trace", () => {
    const column = new Float64Array(1000).fill(2);
    column.fill(Number.NaN, 300, 500);
    column[700] = Number.NaN;
    const out = thinColumns(stamps(1000, 1000), [column], { from: 0, to: 1000, pixels: 100 });
    const values = out.columns[0] as Float64Array;
    expect(values[70]).toBeNaN();
    expect(values[140]).toBe(2);
  });

  it("breaks the line at a gap in time", () => {
    const timeS = Float64Array.from([0, 1, 2, 10, 11]);
    const out = thinColumns(timeS, [timeS], { from: 0, to: 5, pixels: 100 }, [3]);
    expect(Array.from(out.timeS)).toEqual([0, 1, 2, 6, 10, 11]);
    expect(out.columns[0]?.[3]).toBeNaN();
  });

  it("leaves a gap empty where it thins as well", () => {
    const timeS = Float64Array.from({ length: 2000 }, (_, i) => (i < 1000 ? i : i + 2000) / 1000);
    const out = thinColumns(timeS, [timeS], { from: 0, to: 2000, pixels: 40 }, [1000]);
    expect(out.columns[0]?.[30]).toBeNaN();
  });
});

describe("finding a sample by its time", () => {
  it("finds the first sample at or after a time", () => {
    const timeS = stamps(5, 1);
    expect(firstAtOrAfter(timeS, -1)).toBe(0);
    expect(firstAtOrAfter(timeS, 2)).toBe(2);
    expect(firstAtOrAfter(timeS, 2.1)).toBe(3);
    expect(firstAtOrAfter(timeS, 9)).toBe(5);
  });

  it("finds the nearest sample, at the ends too", () => {
    const timeS = stamps(5, 1);
    expect([-4, 1.4, 1.6, 99].map((at) => nearestSample(timeS, at))).toEqual([0, 1, 2, 4]);
  });

  it("puts missing stamps evenly between their neighbours", () => {
    const nan = Number.NaN;
    const filled = withoutMissingStamps(Float64Array.from([nan, 1, nan, nan, 4, nan]), 1);
    expect(Array.from(filled)).toEqual([0, 1, 2, 3, 4, 5]);
  });
});
