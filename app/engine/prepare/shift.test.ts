import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { shiftEarlier } from "#app/engine/prepare/shift.ts";

const rateHz = 1000;

describe("taking a delay out of a signal", () => {
  const late = Float64Array.from({ length: 12 }, (_, i) => (i - 3) ** 2);
  const all = [{ start: 0, end: 12 }];

  it("takes the value of t + lag: a signal that is 3 ms late is put right by 3", () => {
    const y = shiftEarlier(late, all, rateHz, 3);
    expect([...y.slice(0, 9)]).toEqual([0, 1, 4, 9, 16, 25, 36, 49, 64]);
    expect([...y.slice(9)].every(Number.isNaN)).toBe(true);
  });

  it("goes the other way for a negative lag", () => {
    const y = shiftEarlier(late, all, rateHz, -2);
    expect([...y.slice(0, 2)].every(Number.isNaN)).toBe(true);
    expect([...y.slice(2)]).toEqual([...late.slice(0, 10)]);
  });

  it("interpolates linearly between samples", () => {
    const y = shiftEarlier(late, all, rateHz, 1.25);
    expect(y[0]).toBeCloseTo(4 + 0.25 * (1 - 4), 14);
    expect(y[9]).toBeCloseTo(49 + 0.25 * (64 - 49), 14);
    expect(y[10]).toBeNaN();
  });

  it("never reaches into another segment", () => {
    const y = shiftEarlier(
      late,
      [
        { start: 0, end: 5 },
        { start: 6, end: 12 },
      ],
      rateHz,
      2,
    );
    expect([...y]).toEqual([
      late[2],
      late[3],
      late[4],
      Number.NaN,
      Number.NaN,
      Number.NaN,
      late[8],
      late[9],
      late[10],
      late[11],
      Number.NaN,
      Number.NaN,
    ]);
  });

  it("keeps the last sample where a measured rate makes a whole lag a hair longer", () => {
    const y = shiftEarlier(late, all, 1000.0000001, 3);
    expect(y[8]).toBe(64);
  });

  it("is exact on a straight line for any lag", () => {
    fc.assert(
      fc.property(fc.double({ min: -100, max: 100, noNaN: true }), (lagMs) => {
        const line = Float64Array.from({ length: 300 }, (_, i) => 0.5 + 2 * (i / rateHz));
        const y = shiftEarlier(line, [{ start: 0, end: 300 }], rateHz, lagMs);
        let defined = 0;
        y.forEach((value, i) => {
          if (Number.isNaN(value)) return;
          defined += 1;
          expect(value).toBeCloseTo(0.5 + 2 * (i / rateHz + lagMs / 1000), 8);
        });
        expect(defined).toBe(300 - Math.ceil(Math.abs(lagMs) - 1e-6));
      }),
      { numRuns: 100, seed: 9 },
    );
  });
});
