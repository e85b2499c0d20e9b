import { describe, expect, it } from "vitest";
import { fivePointFirst, fivePointSecond } from "#app/engine/math/difference.ts";
import { minimumJerk } from "#app/engine/math/minimum-jerk.ts";

const stepS = 0.001;

/** Samples from −0.03 s on, so that no power is far larger at one end. */
function sampled(n: number, at: (timeS: number) => number): Float64Array {
  return Float64Array.from({ length: n }, (_, i) => at((i - 30) * stepS));
}

describe("five-point central differences", () => {
  it("are exact for a polynomial of degree 4, away from the two samples at each end", () => {
    const x = sampled(61, (t) => 2 + 3 * t - 40 * t ** 2 + 500 * t ** 3 + 7000 * t ** 4);
    const first = fivePointFirst(x, stepS);
    const second = fivePointSecond(x, stepS);
    for (let i = 2; i < 59; i++) {
      const t = (i - 30) * stepS;
      expect(first[i]).toBeCloseTo(3 - 80 * t + 1500 * t ** 2 + 28000 * t ** 3, 10);
      // Rounding of values near 2 divided by h²: 2e-16 / 1e-6 · 5.
      expect(Math.abs((second[i] ?? Number.NaN) - (-80 + 3000 * t + 84000 * t ** 2))).toBeLessThan(
        2e-8,
      );
    }
  });

  it("have no value at the two samples at each end, nor in a signal under five samples", () => {
    const x = Float64Array.of(0, 1, 4, 9, 16, 25);
    for (const y of [fivePointFirst(x, 1), fivePointSecond(x, 1)]) {
      expect([...y].map(Number.isNaN)).toEqual([true, true, false, false, true, true]);
    }
    expect(fivePointFirst(x, 1)[2]).toBeCloseTo(4, 14);
    expect(fivePointSecond(x, 1)[3]).toBeCloseTo(2, 14);
    expect([...fivePointFirst(Float64Array.of(1, 2, 3, 4), 1)].every(Number.isNaN)).toBe(true);
  });

  // Closed form: a sine of w radians a sample keeps (8 sin w − sin 2w) / 6w of its first and
  // (30 − 32 cos w + 2 cos 2w) / 12w² of its second derivative.
  it.each([10, 20, 50, 100])("keep the share of a %i Hz sine that the formula says", (hz) => {
    const w = 2 * Math.PI * hz * stepS;
    const x = sampled(61, (t) => Math.sin(2 * Math.PI * hz * t));
    const first = fivePointFirst(x, stepS);
    const second = fivePointSecond(x, stepS);
    const firstGain = (8 * Math.sin(w) - Math.sin(2 * w)) / (6 * w);
    const secondGain = (30 - 32 * Math.cos(w) + 2 * Math.cos(2 * w)) / (12 * w * w);
    for (let i = 2; i < 59; i++) {
      const phase = w * (i - 30);
      const rate = w / stepS;
      expect((first[i] ?? Number.NaN) / rate).toBeCloseTo(firstGain * Math.cos(phase), 11);
      expect((second[i] ?? Number.NaN) / rate ** 2).toBeCloseTo(-secondGain * Math.sin(phase), 9);
    }
    // The worst case at the usual cut-off of 20 Hz costs 0.001 %.
    if (hz === 20) expect(1 - secondGain).toBeLessThan(1e-5);
  });

  it("follow a 50 ms ramp at 1 kHz within 0.05 % of its peaks, but for its corners", () => {
    const x = sampled(111, (t) => minimumJerk(0.0524, 0.05, t).position);
    const first = fivePointFirst(x, stepS);
    const second = fivePointSecond(x, stepS);
    for (let i = 33; i <= 77; i++) {
      const { velocity, acceleration } = minimumJerk(0.0524, 0.05, (i - 30) * stepS);
      expect(Math.abs((first[i] ?? Number.NaN) - velocity)).toBeLessThan(0.0005 * 1.965);
      expect(Math.abs((second[i] ?? Number.NaN) - acceleration)).toBeLessThan(0.0005 * 121);
    }
  });
});
