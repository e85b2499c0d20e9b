import { describe, expect, it } from "vitest";
import { seededRandom } from "#app/engine/math/random.ts";
import { windowSpread } from "#app/engine/pool/interval.ts";

describe("the interval over window estimates", () => {
  it("is that of R's t.test on the extra hours of sleep of group 2 (data set `sleep`, 1e-9)", () => {
    // R 4.2.2: mean 2.33, 95 percent confidence interval 0.8976775 to 3.7623225, sd 2.002249.
    const hours = [1.9, 0.8, 1.1, 0.1, -0.1, 4.4, 5.5, 1.6, 4.6, 3.4];
    const spread = windowSpread(hours, 0.95);
    expect(spread?.mean).toBeCloseTo(2.33, 12);
    expect(spread?.sd).toBeCloseTo(2.002249, 6);
    expect(spread?.t?.[0]).toBeCloseTo(0.8976775, 6);
    expect(spread?.t?.[1]).toBeCloseTo(3.7623225, 6);
  });

  it("is not defined for one window, and nothing is for none", () => {
    expect(windowSpread([40], 0.95)).toEqual({ mean: 40, sd: null, t: null });
    expect(windowSpread([], 0.95)).toBeNull();
  });

  // Numpy, 20 000 repetitions: windows that are independent are covered 94.7 and 95.0 %, windows
  // that follow their neighbour with a correlation of 0.5 only 79.9 and 75.2 %. Tolerance: 3
  // standard errors of the difference to our 4000.
  it.each([
    [0, 5, 0.947],
    [0, 10, 0.95],
    [0.5, 5, 0.799],
    [0.5, 10, 0.752],
  ])("with a correlation of %f between neighbours and %i windows covers %f", (rho, n, share) => {
    const random = seededRandom(2026);
    const normal = () => {
      const [u, v] = [random.nextUint32() + 1, random.nextUint32()];
      return Math.sqrt(-2 * Math.log(u / 2 ** 32)) * Math.cos((2 * Math.PI * v) / 2 ** 32);
    };
    let covered = 0;
    const repetitions = 4000;
    for (let r = 0; r < repetitions; r++) {
      const estimates: number[] = [normal()];
      for (let i = 1; i < n; i++) {
        estimates.push(rho * (estimates[i - 1] ?? 0) + Math.sqrt(1 - rho * rho) * normal());
      }
      const [low, high] = windowSpread(estimates, 0.95)?.t ?? [1, -1];
      if (low <= 0 && high >= 0) covered++;
    }
    const error = Math.sqrt(share * (1 - share) * (1 / repetitions + 1 / 20_000));
    expect(Math.abs(covered / repetitions - share)).toBeLessThan(3 * error);
  });
});
