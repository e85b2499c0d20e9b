import { describe, expect, it } from "vitest";
import { rawExtremes } from "#app/engine/channels/clipping.ts";

function extremes(values: number[]) {
  const { clippedRun, ...rest } = rawExtremes(Float64Array.from(values));
  return { ...rest, clippedRun: [...clippedRun].join("") };
}

describe("rawExtremes", () => {
  it("marks five or more samples in a row at the largest or the smallest raw value", () => {
    expect(extremes([0, 9, 9, 9, 9, 9, 1, -3, -3, -3, -3, -3, -3, 2])).toEqual({
      rawMin: -3,
      rawMax: 9,
      constant: false,
      clippedRun: "01111101111110",
    });
  });

  it("does not mark four, nor five at another value, nor five with one missing among them", () => {
    const five = [4, 4, 4, 4, 4];
    expect(extremes([0, 9, 9, 9, 9, 1, ...five, 9]).clippedRun).toBe("000000000000");
    expect(extremes([0, 9, 9, Number.NaN, 9, 9, 9, 1]).clippedRun).toBe("00000000");
  });

  it("tells a channel of one value, missing samples aside", () => {
    expect(extremes([2, Number.NaN, 2])).toMatchObject({ rawMin: 2, rawMax: 2, constant: true });
    expect(extremes([2, 2, 2.5]).constant).toBe(false);
  });

  it("has no extremes where all is missing", () => {
    expect(extremes([Number.NaN, Number.NaN])).toEqual({
      rawMin: Number.NaN,
      rawMax: Number.NaN,
      constant: false,
      clippedRun: "00",
    });
  });
});
