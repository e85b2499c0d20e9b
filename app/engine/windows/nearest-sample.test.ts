import { describe, expect, it } from "vitest";
import { nearestSample } from "#app/engine/windows/nearest-sample.ts";

const { NaN: none } = Number;

describe("the nearest sample", () => {
  const timeS = Float64Array.of(0, 0.1, 0.2, none, none, 0.9, 1, none);

  it.each([
    [0.12, 1],
    [0.16, 2],
    [0.2, 2],
    [0.5, 2],
    [0.6, 5],
    [-4, 0],
    [7, 6],
  ])("of %f s is %i: the stamps decide, not the gap between them", (atS, sample) => {
    expect(nearestSample(timeS, atS)).toBe(sample);
  });

  it("of two equally near ones is the earlier", () => {
    expect(nearestSample(Float64Array.of(0, 1, 2), 0.5)).toBe(0);
  });

  it("is none without stamps", () => {
    expect(nearestSample(Float64Array.of(none, none), 1)).toBeNull();
    expect(nearestSample(new Float64Array(0), 1)).toBeNull();
  });
});
