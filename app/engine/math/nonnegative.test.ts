import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { leastSquares } from "#app/engine/math/least-squares.ts";
import {
  nonnegativeFromNormalEquations,
  nonnegativeLeastSquares,
} from "#app/engine/math/nonnegative.ts";
import { normalEquations } from "#app/engine/math/normal-equations.ts";
import { readFixture } from "../../../tests/support/read-fixture.ts";

const scipy = readFixture<{
  nnls: {
    name: string;
    A: number[][];
    b: number[];
    x: number[];
    residual_norm: number;
    active: number[];
  }[];
}>("nonnegative-least-squares", "scipy.json");

describe("non-negative least squares against scipy.optimize.nnls", () => {
  it.each(scipy.nnls)("$name: 1e-10 of the largest, zeros exact", ({ A, b, x, active }) => {
    const columns = columnsOf(A);
    const y = Float64Array.from(b);
    const fit = nonnegativeLeastSquares(columns, y);
    if (fit.status !== "solved") throw new Error(fit.status);
    expect(fit.bound).toEqual(active);
    const largest = Math.max(...x);
    x.forEach((value, j) => {
      if (value === 0) expect(fit.coefficients[j]).toBe(0);
      expect(Math.abs((fit.coefficients[j] ?? Number.NaN) - value)).toBeLessThanOrEqual(
        1e-10 * largest,
      );
    });
    const free = leastSquares(columns, y);
    expect(fit.conditionNumber).toBe(free.status === "solved" ? free.conditionNumber : null);
  });

  it.each(scipy.nnls)("from normal equations, 1e-8: $name", ({ A, b, x }) => {
    const coefficients = nonnegativeFromNormalEquations(
      normalEquations(columnsOf(A), Float64Array.from(b)),
    );
    const largest = Math.max(...x);
    x.forEach((value, j) => {
      if (value === 0) expect(coefficients?.[j]).toBe(0);
      expect(Math.abs((coefficients?.[j] ?? Number.NaN) - value)).toBeLessThanOrEqual(
        1e-8 * largest,
      );
    });
  });
});

describe("a bounded fit", () => {
  const vector = (length: number) =>
    fc.array(fc.double({ min: -10, max: 10, noNaN: true }), {
      minLength: length,
      maxLength: length,
    });
  const problem = fc
    .integer({ min: 1, max: 4 })
    .chain((n) => fc.tuple(fc.array(vector(8), { minLength: n, maxLength: n }), vector(8)));

  // Karush–Kuhn–Tucker: no coefficient below 0; no slope where it is free, none upwards at the bound.
  it("has no better neighbour", () => {
    fc.assert(
      fc.property(problem, ([rawColumns, rawY]) => {
        const columns = rawColumns.map((column) => Float64Array.from(column));
        const y = Float64Array.from(rawY);
        const fit = nonnegativeLeastSquares(columns, y);
        if (fit.status === "singular" || fit.conditionNumber > 1e4) return;
        const scale = Math.hypot(...y);
        columns.forEach((column, j) => {
          const residual = y.map((value, i) =>
            columns.reduce(
              (rest, other, k) => rest - (fit.coefficients[k] ?? 0) * (other[i] ?? 0),
              value,
            ),
          );
          const slope =
            column.reduce((sum, v, i) => sum + v * (residual[i] ?? 0), 0) / Math.hypot(...column);
          if (fit.bound.includes(j)) {
            expect(fit.coefficients[j]).toBe(0);
            expect(slope).toBeLessThanOrEqual(1e-9 * scale);
          } else {
            expect(fit.coefficients[j]).toBeGreaterThan(0);
            expect(Math.abs(slope)).toBeLessThanOrEqual(1e-9 * scale);
          }
        });
      }),
      { numRuns: 500, seed: 5 },
    );
  });

  it("is the free fit where that has nothing below 0", () => {
    const columns = [Float64Array.of(1, 0, 1), Float64Array.of(0, 1, 1)];
    const y = Float64Array.of(2, 3, 5.3);
    const free = leastSquares(columns, y);
    const bounded = nonnegativeLeastSquares(columns, y);
    if (free.status !== "solved" || bounded.status !== "solved") throw new Error("not solved");
    expect(bounded.bound).toEqual([]);
    bounded.coefficients.forEach((b, j) => {
      expect(b).toBeCloseTo(free.coefficients[j] ?? Number.NaN, 13);
    });
  });

  it("uses only the rows asked for, and is singular where the free fit is", () => {
    const x = Float64Array.of(9, 1, 2, 3);
    const bounded = nonnegativeLeastSquares([x], Float64Array.of(-9, 2, 4, 6), 1, 4);
    expect(bounded.status === "solved" && bounded.coefficients[0]).toBeCloseTo(2, 13);
    expect(nonnegativeLeastSquares([x, x], x)).toEqual({ status: "singular" });
    expect(nonnegativeFromNormalEquations(normalEquations([x, x], x))).toBeNull();
    expect(nonnegativeFromNormalEquations(normalEquations([new Float64Array(4)], x))).toBeNull();
  });
});

function columnsOf(rows: number[][]): Float64Array[] {
  return (rows[0] ?? []).map((_, j) => Float64Array.from(rows, (row) => row[j] ?? Number.NaN));
}
