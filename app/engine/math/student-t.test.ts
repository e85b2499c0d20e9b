import { describe, expect, it } from "vitest";
import { tQuantile } from "#app/engine/math/student-t.ts";
import { readFixture } from "../../../tests/support/read-fixture.ts";

const { rows } = readFixture<{ rows: { probability: number; df: number; t: number }[] }>(
  "student-t",
  "mpmath.json",
);

describe("Student's t against the incomplete beta integral in 40 digits, 1e-12", () => {
  it.each(rows)("quantile $probability with $df degrees of freedom", ({ probability, df, t }) => {
    expect(Math.abs(tQuantile(probability, df) / t - 1)).toBeLessThan(1e-12);
  });

  it("is symmetric", () => {
    expect(tQuantile(0.025, 9)).toBeCloseTo(-tQuantile(0.975, 9), 12);
    expect(tQuantile(0.5, 4)).toBe(0);
  });
});

it("a quantile of t is refused outside of 0 and 1 and without degrees of freedom", () => {
  for (const p of [0, 1, -0.1, Number.NaN]) expect(() => tQuantile(p, 5)).toThrow(RangeError);
  expect(() => tQuantile(0.9, 0)).toThrow(RangeError);
});
