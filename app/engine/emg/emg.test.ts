import { describe, expect, it } from "vitest";
import { emgTiming, quietLevel, raisedLimit } from "#app/engine/emg/burst.ts";
import { movingLevel } from "#app/engine/emg/moving-level.ts";

const RATE = 1000;

describe("the moving level", () => {
  const sine = (hz: number, n = 3000) =>
    Float64Array.from({ length: n }, (_, i) => Math.sin((2 * Math.PI * hz * i) / RATE));
  const whole = [{ start: 0, end: 3000 }];

  it("of a sine within the band is its RMS; an offset and slow drift are left out", () => {
    const level = movingLevel(
      sine(100).map((x) => x + 5),
      whole,
      RATE,
    );
    expect(level[2500]).toBeCloseTo(Math.SQRT1_2, 2);
    expect(movingLevel(sine(1), whole, RATE)[2500]).toBeLessThan(0.01);
  });

  it("looks only back: nothing shows before a step", () => {
    const step = new Float64Array(3000).fill(1, 1500);
    // The mean of the stretch is taken off first: before the step the signal is a constant.
    const level = movingLevel(step, whole, RATE);
    expect(level[1499]).toBeLessThan(1e-6);
    expect(level[1500]).toBeGreaterThan(0.1);
  });

  it("has no value before 10 ms of a stretch, at missing cells, and where the rate leaves no band", () => {
    const emg = sine(100);
    emg[1000] = Number.NaN;
    const level = movingLevel(emg, whole, RATE);
    expect([level[8], level[1000], level[1009]].every(Number.isNaN)).toBe(true);
    expect([level[9], level[999], level[1010]].some(Number.isNaN)).toBe(false);
    expect(movingLevel(sine(1), whole, 44).every(Number.isNaN)).toBe(true);
  });
});

describe("timing", () => {
  /** A level of 1 ± 0.1 with stretches of a value. */
  const levelOf = (stretches: [number, number, number][]) => {
    const level = Float64Array.from({ length: 2000 }, (_, i) => 1 + (i % 2 === 0 ? 0.1 : -0.1));
    for (const [from, to, value] of stretches) level.fill(value, from, to);
    return level;
  };
  const timing = (stretches: [number, number, number][], nextOnset: number | null = null) => {
    const level = levelOf(stretches);
    const quiet = quietLevel(level, 1000, RATE);
    return emgTiming(level, quiet, 1000, nextOnset, [1000, 1100], RATE);
  };

  it("a burst is over mean + 5 SD for at least 10 ms", () => {
    // The SD of ± 0.1 is 0.1001: the limit is 1.5005.
    expect(timing([[1040, 1050, 1.51]])).toMatchObject({ burst: true, latencyMs: 40 });
    expect(timing([[1040, 1049, 1.51]])).toMatchObject({ burst: false, latencyMs: null });
    expect(timing([[1040, 1060, 1.49]])).toMatchObject({ burst: false, latencyMs: null });
  });

  it("the latency is looked for to 200 ms or the next onset", () => {
    expect(timing([[1195, 1220, 2]])).toMatchObject({ burst: false, latencyMs: 195 });
    expect(timing([[1201, 1220, 2]]).latencyMs).toBeNull();
    expect(timing([[1150, 1170, 2]], 1140).latencyMs).toBeNull();
  });

  it("a burst that was there before the onset is no answer, the next one is", () => {
    const early: [number, number, number] = [990, 1020, 2];
    expect(timing([early])).toMatchObject({ burst: true, latencyMs: null });
    expect(timing([early, [1060, 1080, 2]]).latencyMs).toBe(60);
  });

  it("10 ms of a burst have to lie inside the window for the flag", () => {
    expect(timing([[1091, 1130, 2]])).toMatchObject({ burst: true, latencyMs: 91 });
    expect(timing([[1092, 1130, 2]])).toMatchObject({ burst: false, latencyMs: 92 });
  });

  it("without a quiet level, less than half of 500 ms, nothing is said", () => {
    const level = levelOf([]);
    expect(quietLevel(level, 249, RATE)).toBeNull();
    expect(quietLevel(level, 250, RATE)?.mean).toBeCloseTo(1, 6);
    expect(emgTiming(level, null, 100, null, [100, 200], RATE)).toEqual({
      baseline: null,
      burst: false,
      latencyMs: null,
    });
  });

  it("a level is raised over twice the median of those that are kept", () => {
    expect(raisedLimit([1, 2, 9])).toBe(4);
    expect(raisedLimit([])).toBe(Number.POSITIVE_INFINITY);
  });
});
