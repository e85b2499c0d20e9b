import { describe, expect, it } from "vitest";
import { stampedTimeBase, statedTimeBase } from "#app/engine/channels/time-base.ts";
import numpy from "../../../fixtures/reading-time-base/numpy.json";

const lineOf = (row: number): number => row + 2;

function baseOf(stamps: number[], unit: "s" | "ms" | "us" = "ms") {
  return stampedTimeBase(Float64Array.from(stamps), unit, "t", lineOf);
}

function steps(...list: number[]): number[] {
  let at = 0;
  return [0, ...list.map((step) => (at += step))];
}

describe("stampedTimeBase", () => {
  it.each(Object.entries(numpy.cases))(
    "finds rate, gaps, duplicates and stretches of the case %s (numpy diff and median, 1e-12)",
    (_, truth) => {
      const base = baseOf(truth.stamps_ms);
      expect(Math.abs(base.rateHz / truth.rate_hz - 1)).toBeLessThan(1e-12);
      expect(base.durationS).toBeCloseTo(truth.duration_s, 12);
      expect(base.gapBefore).toEqual(truth.gap_before);
      expect(base.duplicateBefore).toEqual(truth.duplicate_before);
      expect(base.jitter).toBe(truth.jitter);
      expect(base.segments.map(({ start, end }) => [start, end])).toEqual(truth.segments);
      expect([...base.timeS]).toEqual(truth.stamps_ms.map((stamp) => stamp / 1000));
    },
  );

  it("gives the true rate of 1 500 Hz although each stamp is rounded to a tenth of a ms", () => {
    // The two ends are off by up to 0.05 of 79 ms; the median step would say 1 429 Hz.
    expect(Math.abs(baseOf(numpy.cases.fine.stamps_ms).rateHz - 1500)).toBeLessThan(1);
  });

  it("gives a round rate to the last bit, however many steps there are", () => {
    for (const count of [5791, 5793, 999]) {
      expect(baseOf(steps(...Array<number>(count).fill(1))).rateHz).toBe(1000);
    }
  });

  it("keeps the file's own time and its unit", () => {
    const base = baseOf([5000000, 5000500, 5001000, 5001500], "us");
    expect(base.timeS[0]).toBe(5);
    expect(base.rateHz).toBe(2000);
    expect(base.durationS).toBe(0.0015);
  });

  it("takes a step of exactly 1.5 medians for a gap, in seconds too, and a shorter one for jitter", () => {
    expect(baseOf(steps(1, 1, 1, 1.5, 1, 1)).gapBefore).toEqual([4]);
    const seconds = [0, 0.001, 0.002, 0.003, 0.0045, 0.0055, 0.0065];
    expect(baseOf(seconds, "s").gapBefore).toEqual([4]);
    expect(baseOf(steps(1, 1, 1, 1.49, 1, 1))).toMatchObject({ gapBefore: [], jitter: true });
  });

  it("takes a step off by 1 % for regular and by more for jitter", () => {
    expect(baseOf(steps(1, 1, 1, 1.01, 0.99, 1)).jitter).toBe(false);
    expect(baseOf(steps(1, 1, 1, 1.011, 1, 1)).jitter).toBe(true);
    expect(baseOf(steps(1, 1, 1, 0.5, 1, 1))).toMatchObject({ jitter: true, gapBefore: [] });
  });

  it("does not let gaps or duplicates into the rate", () => {
    const base = baseOf([...steps(...Array<number>(40).fill(1)), 140, 140, 141]);
    expect(base.rateHz).toBe(1000);
    expect(base).toMatchObject({ gapBefore: [41], duplicateBefore: [42] });
  });

  it("breaks stretches at missing stamps without counting a gap", () => {
    const base = baseOf([0, 1, 2, Number.NaN, 4, 5, 6]);
    expect(base.segments).toEqual([
      { start: 0, end: 3 },
      { start: 4, end: 7 },
    ]);
    expect(base.gapBefore).toEqual([]);
    expect(base.rateHz).toBe(1000);
  });

  it("starts no stretch before the first stamp and none after the last", () => {
    const base = baseOf([Number.NaN, 1, 2, 3, Number.NaN]);
    expect(base.segments).toEqual([{ start: 1, end: 4 }]);
    expect(base.durationS).toBe(0.002);
  });

  it("refuses a stamp before the one above, with its line, across missing ones too", () => {
    const wanted = expect.objectContaining({ name: "unreadable", line: 5 });
    expect(() => baseOf([0, 1, 2, 1.5, 4])).toThrow(wanted);
    expect(() => baseOf([0, 2, Number.NaN, 1, 4])).toThrow(wanted);
  });

  it("refuses stamps of which over 5 % repeat and says to state the rate", () => {
    const wanted = expect.objectContaining({
      name: "unreadable",
      message: expect.stringMatching(/time_too_coarse.*rate_hz/),
    });
    expect(() => baseOf(numpy.too_coarse_ms)).toThrow(wanted);
    expect(() => baseOf(Array<number>(40).fill(3))).toThrow(wanted);
    const twenty = steps(...Array<number>(19).fill(1));
    expect(baseOf([...twenty, 19]).duplicateBefore).toEqual([20]); // 1 of 20 steps: just 5 %
    expect(() => baseOf([...twenty, 19, 19])).toThrow(wanted);
  });

  it("refuses a column without two stamps in a row", () => {
    expect(() => baseOf([Number.NaN, 1, Number.NaN, 3])).toThrow(/no two time stamps/);
    expect(() => baseOf([Number.NaN, Number.NaN])).toThrow(/no two time stamps/);
  });

  it("finds the median step of a long recording with all steps alike", () => {
    const stamps = Array.from({ length: 200001 }, (_, i) => i / 2);
    expect(baseOf(stamps).rateHz).toBe(2000);
  });
});

describe("statedTimeBase", () => {
  it("puts the first sample at 0 and knows no gaps", () => {
    const base = statedTimeBase(5, 2000);
    expect([...base.timeS]).toEqual([0, 0.0005, 0.001, 0.0015, 0.002]);
    expect(base).toMatchObject({
      rateHz: 2000,
      durationS: 0.002,
      segments: [{ start: 0, end: 5 }],
      gapBefore: [],
      duplicateBefore: [],
      jitter: false,
    });
  });
});
