import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { correlationOf, leastSquares, predict } from "#app/engine/math/least-squares.ts";
import { readFixture } from "../../../tests/support/read-fixture.ts";

interface StrdSet {
  name: string;
  model: string;
  p: number;
  x: string[][];
  y: string[];
  beta: string[];
  se: string[];
  residual_sd: string;
  condition_unit_columns: string;
}
const strd = readFixture<{ sets: StrdSet[] }>("nist-linear-regression", "strd.json");
const scipy = readFixture<{
  nnls: { name: string; A: number[][]; b: number[]; unconstrained: number[] }[];
  condition: { rows: number; cond_unit_columns: number; estimate_correlation: number[][] }[];
}>("nonnegative-least-squares", "scipy.json");

/** Digits asked, smallest over the coefficients (reasons in the fixture's ORIGIN.md). */
const DIGITS: Record<string, number> = {
  norris: 11,
  noint1: 14,
  noint2: 14,
  filip: 6.5,
  longley: 10,
  wampler1: 8.5,
  wampler2: 11.5,
  wampler3: 8.5,
  wampler4: 7,
  wampler5: 5,
};

describe("least squares against NIST StRD's certified values", () => {
  it.each(strd.sets)("$name keeps its digits", (set) => {
    const columns = designOf(set);
    const y = Float64Array.from(set.y, Number);
    const fit = leastSquares(columns, y);
    if (fit.status !== "solved") throw new Error(`${set.name} is ${fit.status}`);
    expect(digits(fit.coefficients, set.beta)).toBeGreaterThanOrEqual(DIGITS[set.name] ?? 15);
    const condition = Number(set.condition_unit_columns);
    expect(Math.abs(fit.conditionNumber / condition - 1)).toBeLessThan(1e-3);

    const sd = Number(set.residual_sd);
    if (sd > 0) {
      // Residual SD and standard errors: 6 digits, which Filip's condition of 5e9 leaves.
      const degreesOfFreedom = y.length - set.p;
      expect(Math.sqrt(fit.residualSumOfSquares / degreesOfFreedom) / sd).toBeCloseTo(1, 6);
      set.se.forEach((se, j) => {
        const variance = fit.covarianceUnscaled[j * set.p + j] ?? Number.NaN;
        expect((sd * Math.sqrt(variance)) / Number(se)).toBeCloseTo(1, 6);
      });
    }
  });
});

describe("least squares against numpy, columns I, B, K of a ramp", () => {
  it.each(scipy.condition)(
    "condition of the first $rows samples with unit columns, 1e-8",
    (row) => {
      const { A, b } = first(scipy.nnls);
      const columns = columnsOf(A);
      const fit = leastSquares(columns, Float64Array.from(b), 0, row.rows);
      if (fit.status !== "solved") throw new Error(fit.status);
      expect(Math.abs(fit.conditionNumber / row.cond_unit_columns - 1)).toBeLessThan(1e-8);
      const correlation = correlationOf(fit.covarianceUnscaled, 3);
      row.estimate_correlation.flat().forEach((value, k) => {
        expect(correlation[k]).toBeCloseTo(value, 10);
      });
    },
  );

  it.each(scipy.nnls)("free coefficients: $name", ({ A, b, unconstrained }) => {
    const fit = leastSquares(columnsOf(A), Float64Array.from(b));
    if (fit.status !== "solved") throw new Error(fit.status);
    unconstrained.forEach((value, j) => {
      expect(Math.abs((fit.coefficients[j] ?? Number.NaN) - value)).toBeLessThanOrEqual(
        1e-10 * Math.max(...unconstrained.map(Math.abs)),
      );
    });
  });
});

describe("condition number", () => {
  // Two unit columns at an angle with cosine c: √((1 + |c|) / (1 − |c|)).
  it("of two columns is the closed form of their cosine", () => {
    const fit = leastSquares(
      [Float64Array.of(1, 3, 5), Float64Array.of(2, 4, 6)],
      Float64Array.of(1, 1, 2),
    );
    const c = 44 / Math.sqrt(35 * 56);
    if (fit.status !== "solved") throw new Error(fit.status);
    expect(fit.conditionNumber).toBeCloseTo(Math.sqrt((1 + c) / (1 - c)), 10);
  });

  it("of one column, or of columns at right angles, is 1", () => {
    const one = leastSquares([Float64Array.of(3, 4)], Float64Array.of(1, 2));
    const two = leastSquares(
      [Float64Array.of(3, 4), Float64Array.of(-4e6, 3e6)],
      Float64Array.of(1, 2),
    );
    if (one.status !== "solved" || two.status !== "solved") throw new Error("not solved");
    expect(one.conditionNumber).toBe(1);
    expect(two.conditionNumber).toBeCloseTo(1, 14);
  });

  it("does not depend on the columns' units", () => {
    const a = Float64Array.of(1, 2, 4, 3);
    const b = Float64Array.of(2, 1, 0, 1);
    const y = Float64Array.of(1, 2, 3, 4);
    const plain = leastSquares([a, b], y);
    const scaled = leastSquares([a.map((v) => v * 1e-9), b.map((v) => v * 1e7)], y);
    if (plain.status !== "solved" || scaled.status !== "solved") throw new Error("not solved");
    expect(scaled.conditionNumber).toBeCloseTo(plain.conditionNumber, 12);
    expect((scaled.coefficients[0] ?? 0) * 1e-9).toBeCloseTo(plain.coefficients[0] ?? 0, 12);
  });
});

describe("what least squares leaves", () => {
  const vector = fc.array(fc.double({ min: -10, max: 10, noNaN: true }), {
    minLength: 12,
    maxLength: 12,
  });

  it("is at right angles to every column, and its square is the residual sum of squares", () => {
    fc.assert(
      fc.property(vector, vector, vector, vector, (p, q, r, values) => {
        const columns = [p, q, r].map((column) => Float64Array.from(column));
        const y = Float64Array.from(values);
        const fit = leastSquares(columns, y);
        if (fit.status === "singular" || fit.conditionNumber > 1e4) return;
        const residual = predict(columns, fit.coefficients, 0, 12).map((v, i) => (y[i] ?? 0) - v);
        let square = 0;
        for (const value of residual) square += value * value;
        expect(fit.residualSumOfSquares).toBeCloseTo(square, 8);
        for (const column of columns) {
          const dot = column.reduce((sum, v, i) => sum + v * (residual[i] ?? 0), 0);
          expect(dot).toBeCloseTo(0, 7);
        }
      }),
      { numRuns: 200, seed: 4 },
    );
  });

  it("is nothing where there are as many rows as columns", () => {
    const fit = leastSquares([Float64Array.of(1, 1), Float64Array.of(0, 1)], Float64Array.of(5, 7));
    if (fit.status !== "solved") throw new Error(fit.status);
    expect([...fit.coefficients]).toEqual([expect.closeTo(5, 14), expect.closeTo(2, 14)]);
    expect(fit.residualSumOfSquares).toBe(0);
  });
});

describe("rows and ranges", () => {
  it("uses only the rows asked for", () => {
    const x = Float64Array.of(99, 1, 2, 3, -50);
    const y = Float64Array.of(0, 2, 4, 6, 0);
    const fit = leastSquares([x], y, 1, 4);
    if (fit.status !== "solved") throw new Error(fit.status);
    expect(fit.coefficients[0]).toBeCloseTo(2, 14);
  });

  it("calls singular: a column of zeros, two equal columns, fewer rows than columns, no columns", () => {
    const a = Float64Array.of(1, 2, 4);
    const y = Float64Array.of(1, 2, 3);
    expect(leastSquares([a, new Float64Array(3)], y)).toEqual({ status: "singular" });
    expect(leastSquares([a, a.slice()], y)).toEqual({ status: "singular" });
    expect(leastSquares([a, a.map((v) => v / 3)], y)).toEqual({ status: "singular" });
    expect(leastSquares([a, Float64Array.of(1, 1, 1)], y, 0, 1)).toEqual({ status: "singular" });
    expect(leastSquares([], y)).toEqual({ status: "singular" });
  });

  it("refuses rows outside the arrays, columns of another length and what is no finite number", () => {
    const a = Float64Array.of(1, 2, 4);
    expect(() => leastSquares([a], a, 1, 4)).toThrow(RangeError);
    expect(() => leastSquares([a], a, -1, 2)).toThrow(RangeError);
    expect(() => leastSquares([a.subarray(1)], a)).toThrow(RangeError);
    expect(() => leastSquares([Float64Array.of(1, Number.NaN, 2)], a)).toThrow(RangeError);
    expect(() => leastSquares([a], Float64Array.of(1, Number.POSITIVE_INFINITY, 2))).toThrow(
      RangeError,
    );
  });
});

function columnsOf(rows: number[][]): Float64Array[] {
  return (rows[0] ?? []).map((_, j) => Float64Array.from(rows, (row) => row[j] ?? Number.NaN));
}

function designOf({ model, p, x }: StrdSet): Float64Array[] {
  if (model === "noint") return columnsOf(x.map((row) => row.map(Number)));
  const one = Float64Array.from(x, () => 1);
  if (model === "longley" || model === "line") {
    return [one, ...columnsOf(x.map((row) => row.map(Number)))];
  }
  return Array.from({ length: p }, (_, k) => Float64Array.from(x, (row) => power(row[0] ?? "", k)));
}

/** Power of a decimal, rounded once: an error in the last digit of x¹⁰ is felt at Filip's condition. */
function power(decimal: string, exponent: number): number {
  const [whole = "", part = ""] = decimal.split(".");
  return Number(`${BigInt(whole + part) ** BigInt(exponent)}e-${part.length * exponent}`);
}

function digits(actual: Float64Array, expected: string[]): number {
  return Math.min(
    ...expected.map((text, j) => {
      const error = Math.abs((actual[j] ?? Number.NaN) / Number(text) - 1);
      return error === 0 ? 15 : Math.min(15, -Math.log10(error));
    }),
  );
}

function first<T>(items: T[]): T {
  const item = items[0];
  if (item === undefined) throw new Error("no items");
  return item;
}
