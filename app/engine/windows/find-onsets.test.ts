import { describe, expect, it } from "vitest";
import { findOnsets, findTriggerOnsets, onsetThreshold } from "#app/engine/windows/find-onsets.ts";

const RATE = 1000;

/** A velocity of 0 with stretches of a value: [from, to) → rad/s. */
function velocityOf(n: number, stretches: [number, number, number][]): Float64Array {
  const velocity = new Float64Array(n);
  for (const [from, to, value] of stretches) velocity.fill(value, from, to);
  return velocity;
}

function onsetsIn(velocity: Float64Array, ends = [velocity.length], minSeparationMs = 500) {
  return findOnsets({
    velocityRadPerS: velocity,
    segments: ends.map((end, i) => ({ start: ends[i - 1] ?? 0, end })),
    timeS: velocity.map((_, i) => i / RATE),
    rateHz: RATE,
    thresholdRadPerS: 1,
    minSeparationMs,
  });
}

describe("the threshold", () => {
  it("is a quarter of the expected peak velocity of a minimum-jerk ramp", () => {
    const threshold = onsetThreshold(new Float64Array(0), { amplitudeDeg: 3, durationMs: 50 });
    // Peak velocity 1.96350 rad/s for 3 deg in 50 ms (15/8 · A / D).
    expect(threshold).toBeCloseTo(1.963495408493621 / 4, 12);
  });

  it("without an expectation is a quarter of the largest |ω|, at least 5 deg/s", () => {
    expect(onsetThreshold(Float64Array.of(0, -8, Number.NaN, 2), null)).toBe(2);
    expect(onsetThreshold(Float64Array.of(0, 0.1), null)).toBeCloseTo((5 * Math.PI) / 180, 15);
  });
});

describe("a movement", () => {
  it("is over the threshold for at least 10 ms", () => {
    expect(onsetsIn(velocityOf(1000, [[500, 509, 2]]))).toEqual([]);
    expect(onsetsIn(velocityOf(1000, [[500, 510, -2]]))).toEqual([{ onset: 500, underWay: false }]);
  });

  it("begins where |ω − mean| leaves 5 % of its peak, not where it crosses the threshold", () => {
    const velocity = velocityOf(1000, [
      [480, 490, 0.09],
      [490, 500, 0.11],
      [500, 560, 2],
    ]);
    expect(onsetsIn(velocity)).toEqual([{ onset: 490, underWay: false }]);
  });

  it("begins where it leaves three SD of what was before, where that is more", () => {
    const velocity = velocityOf(1000, [[500, 560, 2]]);
    for (let i = 300; i < 500; i++) velocity[i] = i % 2 === 0 ? 0.3 : -0.3;
    velocity.fill(0.8, 490, 496);
    velocity.fill(0.95, 496, 500);
    // The SD of ± 0.3 is 0.3015: the foot ends at 0.905.
    expect(onsetsIn(velocity)).toEqual([{ onset: 496, underWay: false }]);
  });

  it("is measured against the mean before it", () => {
    const velocity = velocityOf(1000, [
      [0, 490, 0.5],
      [490, 500, 0.62],
      [500, 560, 2],
    ]);
    expect(onsetsIn(velocity)).toEqual([{ onset: 490, underWay: false }]);
  });

  it("within the least separation of the last accepted one is none, later ones count from that", () => {
    const velocity = velocityOf(3000, [
      [500, 560, 2],
      [900, 960, -2],
      [1000, 1060, 2],
    ]);
    expect(onsetsIn(velocity).map(({ onset }) => onset)).toEqual([500, 1000]);
  });

  it("that fills a stretch from its first sample on is under way", () => {
    const velocity = velocityOf(1000, [[400, 460, 2]]);
    expect(onsetsIn(velocity, [420, 1000])).toEqual([{ onset: 400, underWay: false }]);
    expect(onsetsIn(velocity, [405, 1000])).toEqual([{ onset: 405, underWay: true }]);
  });
});

describe("a trigger", () => {
  const timeS = Float64Array.from({ length: 12 }, (_, i) => i / 10);

  it("gives the first samples above the middle of its range", () => {
    const trigger = Float64Array.of(1, 1, 2.9, 3.1, 5, 1, 1, 5, 1, 1, 4, 1);
    expect(findTriggerOnsets(trigger, timeS, 0).map(({ onset }) => onset)).toEqual([3, 7, 10]);
    expect(findTriggerOnsets(trigger, timeS, 500).map(({ onset }) => onset)).toEqual([3, 10]);
  });

  it("that stands still, or is up from the first sample on, gives none", () => {
    expect(findTriggerOnsets(new Float64Array(12).fill(5), timeS, 0)).toEqual([]);
    expect(findTriggerOnsets(Float64Array.of(5, 5, 0, 0), timeS, 0)).toEqual([]);
  });

  it("keeps its level over a missing cell", () => {
    const trigger = Float64Array.of(0, Number.NaN, 5, Number.NaN, 5);
    expect(findTriggerOnsets(trigger, timeS, 0).map(({ onset }) => onset)).toEqual([2]);
  });
});
