import { describe, expect, it } from "vitest";
import { minimumJerk } from "#app/engine/math/minimum-jerk.ts";
import { isOtherMovement, measureMovement } from "#app/engine/windows/measure-movement.ts";

const RATE = 1000;
const RAD = Math.PI / 180;

/** Ramps of [start sample, degrees, ms], at 1 kHz. */
function columnsOf(n: number, ramps: [number, number, number][]) {
  const angleRad = new Float64Array(n);
  const velocityRadPerS = new Float64Array(n);
  for (const [start, deg, ms] of ramps) {
    for (let i = 0; i < n; i++) {
      const state = minimumJerk(deg * RAD, ms / 1000, (i - start) / RATE);
      angleRad[i] = (angleRad[i] as number) + state.position;
      velocityRadPerS[i] = (velocityRadPerS[i] as number) + state.velocity;
    }
  }
  return { angleRad, velocityRadPerS };
}

const measure = (
  ramps: [number, number, number][],
  more: Partial<Parameters<typeof measureMovement>[0]> = {},
) =>
  measureMovement({
    ...columnsOf(2000, ramps),
    rateHz: RATE,
    onset: 500,
    nextOnset: null,
    baseline: [450, 500],
    thresholdRadPerS: 0.25,
    expected: null,
    ...more,
  });

describe("a movement", () => {
  it("has an unsigned amplitude, a direction, and lasts while |ω| is 5 % of its peak or more", () => {
    const { sign, amplitudeDeg, durationMs, peakVelocityRadPerS } = measure([[500, -3, 100]]);
    expect([sign, durationMs]).toEqual([-1, 94]);
    expect(amplitudeDeg).toBeCloseTo(3, 12);
    expect(peakVelocityRadPerS).toBeCloseTo((1.875 * 3 * RAD) / 0.1, 12);
  });

  it("keeps its own length beside a faster return within the reach", () => {
    const { durationMs, amplitudeDeg } = measure([
      [500, 3, 100],
      [700, -3, 50],
    ]);
    expect(durationMs).toBe(94);
    expect(amplitudeDeg).toBeCloseTo(3, 9);
  });

  it("is looked at within two and three expected durations", () => {
    const expected = { amplitudeDeg: 3, durationMs: 100 };
    const slow: [number, number, number][] = [[500, 9, 400]];
    expect(measure(slow, { expected }).durationMs).toBe(300);
    // At 200 of 400 ms half of the ramp is done.
    expect(measure(slow, { expected }).amplitudeDeg).toBeCloseTo(4.5, 9);
  });

  it("is not followed into the next onset", () => {
    const ramps: [number, number, number][] = [
      [500, 3, 100],
      [800, 5, 100],
    ];
    expect(measure(ramps).amplitudeDeg).toBeCloseTo(8, 6);
    expect(measure(ramps, { nextOnset: 800 }).amplitudeDeg).toBeCloseTo(3, 9);
  });

  it("without a whole baseline has no amplitude, but a direction", () => {
    expect(measure([[500, -3, 100]], { baseline: [-10, 40] })).toMatchObject({
      sign: -1,
      amplitudeDeg: null,
      durationMs: 94,
    });
  });

  it("that is none has neither direction nor length", () => {
    expect(measure([])).toMatchObject({ sign: null, amplitudeDeg: 0, durationMs: null });
  });
});

describe("another movement", () => {
  const lasting = (durationMs: number | null) => ({
    sign: 1 as const,
    amplitudeDeg: 3,
    durationMs,
    peakVelocityRadPerS: 1,
  });
  const expected = { amplitudeDeg: 3, durationMs: 100 };

  it("lasts over twice or under half as long as expected", () => {
    expect([49, 50, 200, 201].map((ms) => isOtherMovement(lasting(ms), expected))).toEqual([
      true,
      false,
      false,
      true,
    ]);
  });

  it("is none where nothing is expected or nothing was measured", () => {
    expect(isOtherMovement(lasting(900), null)).toBe(false);
    expect(isOtherMovement(lasting(null), expected)).toBe(false);
  });
});
