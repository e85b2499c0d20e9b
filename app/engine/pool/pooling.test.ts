import { describe, expect, it } from "vitest";
import { normalEquations } from "#app/engine/math/normal-equations.ts";
import { bootstrapIntervals } from "#app/engine/pool/bootstrap.ts";
import { correlationMatrix } from "#app/engine/pool/correlation.ts";
import { lagEstimateMs } from "#app/engine/pool/lag.ts";
import { lateTorque } from "#app/engine/pool/late.ts";
import { isPulledByNoise, replicateFlags } from "#app/engine/pool/pooled-flags.ts";
import { meanTrace, stackColumns } from "#app/engine/pool/stack.ts";
import type { WindowColumns } from "#app/engine/types.ts";

function columnsOf(torque: number[]): WindowColumns {
  const zero = torque.map(() => 0);
  return {
    angleRad: Float64Array.from(torque.map((_, i) => i + 1)),
    velocityRadPerS: Float64Array.from(zero),
    accelerationRadPerS2: Float64Array.from(zero),
    torqueNm: Float64Array.from(torque),
  };
}

describe("stack and mean trace", () => {
  it("the stack holds the windows below each other", () => {
    const stack = stackColumns([columnsOf([1, 2]), columnsOf([3])]);
    expect([...stack.torqueNm]).toEqual([1, 2, 3]);
    expect([...stack.angleRad]).toEqual([1, 2, 1]);
  });

  it("the mean is over the samples, by index from the onset, that all windows have", () => {
    const trace = meanTrace([
      { first: 0, columns: columnsOf([1, 2, 3, 4]) },
      { first: 1, columns: columnsOf([10, 20]) },
    ]);
    expect(trace?.first).toBe(1);
    expect([...(trace?.columns.torqueNm ?? [])]).toEqual([6, 11.5]);
  });

  it("half a million windows have one too, and a delay", () => {
    const many = <T>(each: T): T[] => new Array<T>(500_000).fill(each);
    expect(meanTrace(many({ first: 0, columns: columnsOf([1]) }))?.columns.torqueNm[0]).toBe(1);
    expect(lagEstimateMs(many(Float64Array.of(2, 1, 2)), 1000)).toBe(0);
  });

  it("there is none of windows that do not meet, or of none", () => {
    const apart = [
      { first: 0, columns: columnsOf([1]) },
      { first: 5, columns: columnsOf([1]) },
    ];
    expect(meanTrace(apart)).toBeNull();
    expect(meanTrace([])).toBeNull();
  });
});

describe("the bootstrap over windows", () => {
  // One term, one sample a window: a resample's estimate is the mean of its draws.
  const windows = [1, 2, 3, 4, 5].map((y) =>
    normalEquations([Float64Array.of(1)], Float64Array.of(y)),
  );
  const settings = { level: 0.9, resamples: 2000, seed: 1 };

  it("has the ends of the mean of five draws from 1 to 5", () => {
    const [interval] = bootstrapIntervals(windows, false, settings) ?? [];
    // The mean of five draws has mean 3 and SD √(2/5); its 5 and 95 % points are 2 and 4.
    expect(interval?.[0]).toBeCloseTo(2, 0);
    expect(interval?.[1]).toBeCloseTo(4, 0);
  });

  it("is the same for the same seed and another for another", () => {
    const first = bootstrapIntervals(windows, false, { ...settings, resamples: 100 });
    expect(bootstrapIntervals(windows, false, { ...settings, resamples: 100 })).toEqual(first);
    const more = { ...settings, level: 0.81, resamples: 101, seed: 2 };
    expect(bootstrapIntervals(windows, false, more)).not.toEqual(first);
  });

  it("keeps each resample within the bounds", () => {
    const mixed = [-3, -2, -1, 1, 2].map((y) =>
      normalEquations([Float64Array.of(1)], Float64Array.of(y)),
    );
    const [free] = bootstrapIntervals(mixed, false, settings) ?? [];
    const [bounded] = bootstrapIntervals(mixed, true, settings) ?? [];
    expect(free?.[0]).toBeLessThan(0);
    expect(bounded?.[0]).toBe(0);
    expect(bounded?.[1]).toBeCloseTo(free?.[1] ?? 0, 9);
  });
});

describe("the delay that is left", () => {
  const profile = (minimum: number) =>
    Float64Array.from({ length: 41 }, (_, k) => (k - 20 - minimum) ** 2);

  it("is at the vertex of the summed residuals", () => {
    expect(lagEstimateMs([profile(3.25)], 2000)).toBeCloseTo(1.625, 12);
    expect(lagEstimateMs([profile(-2), profile(-3)], 1000)).toBeCloseTo(-2.5, 12);
  });

  it("is null at an end of the range and without windows", () => {
    expect(lagEstimateMs([profile(30)], 1000)).toBeNull();
    expect(lagEstimateMs([], 1000)).toBeNull();
  });

  it("over profiles of different reach looks at what both have", () => {
    expect(lagEstimateMs([profile(1), profile(1).slice(2, 39)], 1000)).toBeCloseTo(1, 12);
  });
});

describe("late torque", () => {
  const pulse = (n: number, from: number, to: number) =>
    Array.from({ length: n }, (_, i) => (i >= from && i < to ? 2 : 0));

  it("begins with the first 10 ms over three times the residual", () => {
    const columns = columnsOf(pulse(100, 30, 50));
    const late = lateTorque({ first: 41, columns }, new Float64Array(100), 0.1, 1000);
    expect(late).toMatchObject({ latency_ms: 71, peak: 2, peak_ms: 71 });
    expect(late.impulse).toBeCloseTo(0.04, 12);
    expect(late.apparent_stiffness).toBeCloseTo(2 / 31, 12);
  });

  it("has no latency where it is over for less than 10 ms", () => {
    const columns = columnsOf(pulse(100, 30, 39));
    expect(
      lateTorque({ first: 0, columns }, new Float64Array(100), 0.1, 1000).latency_ms,
    ).toBeNull();
  });

  it("is nothing without a trace", () => {
    expect(Object.values(lateTorque(null, null, 0.1, 1000)).every((value) => value === null)).toBe(
      true,
    );
  });
});

describe("correlation and flags", () => {
  it("a term that was not estimated has 0 beside 1", () => {
    const correlation = correlationMatrix(Float64Array.of(4, 1, 1, 1), ["K", "I"]);
    expect(correlation).toEqual([
      [1, 0, 0.5],
      [0, 1, 0],
      [0.5, 0, 1],
    ]);
  });

  it("windows are related over 2 / √n, too few under 2", () => {
    expect(replicateFlags(16, 0.51)).toEqual(["windows_related"]);
    expect(replicateFlags(16, 0.5)).toEqual([]);
    expect(replicateFlags(1, null)).toEqual(["too_few_windows"]);
  });

  it("noise pulls I over 2 %, or over half of the interval's half-width", () => {
    const inertia = (half: number) => ({
      mean: 0.01,
      sd: 1,
      t: [0.01 - half, 0.01 + half] as [number, number],
    });
    // A half-width of 4 %: half of it is 2 %; of 1 %: half a per cent.
    expect(isPulledByNoise([1, 2], inertia(0.0004), 2)).toBe(false);
    expect(isPulledByNoise([0.4, 0.8], inertia(0.0001), 2)).toBe(true);
    expect(isPulledByNoise([2, 2.2], inertia(0.01), 2)).toBe(true);
    expect(isPulledByNoise([], inertia(0.01), 2)).toBe(false);
  });
});
