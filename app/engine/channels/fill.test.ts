import { describe, expect, it } from "vitest";
import { countMissing, fillMissing } from "#app/engine/channels/fill.ts";

const gap = Number.NaN;

function fill(values: number[], longest: number, stretches?: { start: number; end: number }[]) {
  const { values: out, filled } = fillMissing(Float64Array.from(values), longest, stretches);
  return { values: [...out], filled: filled === null ? null : [...filled] };
}

describe("fillMissing", () => {
  it("draws a straight line over runs that are short enough, and marks them", () => {
    expect(fill([0, gap, 2, 3, gap, gap, 9], 2)).toEqual({
      values: [0, 1, 2, 3, 5, 7, 9],
      filled: [0, 1, 0, 0, 1, 1, 0],
    });
  });

  it("leaves longer runs as they are", () => {
    expect(fill([0, gap, gap, gap, 4, gap, 6], 2)).toEqual({
      values: [0, gap, gap, gap, 4, 5, 6],
      filled: [0, 0, 0, 0, 0, 1, 0],
    });
  });

  it("fills nothing at the ends, nor across the end of a stretch", () => {
    expect(fill([gap, 1, 2, gap], 3)).toEqual({ values: [gap, 1, 2, gap], filled: null });
    const stretches = [
      { start: 0, end: 3 },
      { start: 3, end: 6 },
    ];
    expect(fill([0, 1, gap, 3, gap, 5], 3, stretches)).toEqual({
      values: [0, 1, gap, 3, 4, 5],
      filled: [0, 0, 0, 0, 1, 0],
    });
  });

  it("does nothing where the protocol allows none, and never changes what it was given", () => {
    expect(fill([0, gap, 2], 0)).toEqual({ values: [0, gap, 2], filled: null });
    const given = Float64Array.of(0, gap, 2);
    fillMissing(given, 1);
    expect(given[1]).toBeNaN();
  });
});

describe("countMissing", () => {
  it("counts cells without a value", () => {
    expect(countMissing(Float64Array.of(1, gap, 0, gap))).toBe(2);
  });
});
