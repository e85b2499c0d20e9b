import { describe, expect, it } from "vitest";
import { butterworthLowpass } from "#app/engine/math/butterworth.ts";
import { filterZeroPhase } from "#app/engine/math/filter.ts";
import { lowPass } from "#app/engine/prepare/low-pass.ts";

const rateHz = 1000;
const filter = { order: 2, cutoffHz: 20 };
const x = Float64Array.from({ length: 400 }, (_, i) => Math.sin(i / 9) + 0.3 * Math.cos(i * 2.1));

describe("low-pass by segments", () => {
  it("filters each gap-free segment whole and on its own", () => {
    const y = lowPass(
      x,
      [
        { start: 0, end: 210 },
        { start: 210, end: 400 },
      ],
      rateHz,
      filter,
    );
    const sections = butterworthLowpass(2, 20, rateHz);
    // Three periods of the cut-off are 150 samples, in both segments less than the segment.
    expect(y.slice(0, 210)).toEqual(filterZeroPhase(sections, x.slice(0, 210), 150));
    expect(y.slice(210)).toEqual(filterZeroPhase(sections, x.slice(210), 150));
  });

  it("reflects a short segment by its length less one sample", () => {
    const y = lowPass(x, [{ start: 10, end: 70 }], rateHz, filter);
    const sections = butterworthLowpass(2, 20, rateHz);
    expect(y.slice(10, 70)).toEqual(filterZeroPhase(sections, x.slice(10, 70), 59));
  });

  it("leaves a segment under 20 samples out whole, with and without a filter", () => {
    const segments = [
      { start: 0, end: 19 },
      { start: 30, end: 50 },
    ];
    for (const each of [filter, null]) {
      const y = lowPass(x, segments, rateHz, each);
      y.forEach((value, i) => {
        expect(Number.isNaN(value)).toBe(i < 30 || i >= 50);
      });
    }
  });

  it("passes segments through where there is no filter, and does not touch its input", () => {
    const copy = x.slice();
    const y = lowPass(x, [{ start: 0, end: 400 }], rateHz, null);
    expect(y).toEqual(x);
    expect(y).not.toBe(x);
    lowPass(x, [{ start: 0, end: 400 }], rateHz, filter);
    expect(x).toEqual(copy);
  });
});
