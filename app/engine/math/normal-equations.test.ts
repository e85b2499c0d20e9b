import { describe, expect, it } from "vitest";
import { leastSquares } from "#app/engine/math/least-squares.ts";
import {
  emptyNormalEquations,
  normalEquations,
  solveNormalEquations,
} from "#app/engine/math/normal-equations.ts";
import { readFixture } from "../../../tests/support/read-fixture.ts";

const { nnls } = readFixture<{ nnls: { A: number[][]; b: number[] }[] }>(
  "nonnegative-least-squares",
  "scipy.json",
);
const ramp = nnls[0] ?? { A: [], b: [] };
const columns = [0, 1, 2].map((j) => Float64Array.from(ramp.A, (row) => row[j] ?? Number.NaN));
const y = Float64Array.from(ramp.b);

describe("normal equations", () => {
  it("give the QR's coefficients to 1e-11 on a ramp's columns (condition 2.4)", () => {
    const qr = leastSquares(columns, y);
    const coefficients = solveNormalEquations(normalEquations(columns, y));
    if (qr.status !== "solved" || coefficients === null) throw new Error("not solved");
    coefficients.forEach((value, j) => {
      expect(value / (qr.coefficients[j] ?? Number.NaN)).toBeCloseTo(1, 11);
    });
  });

  it("of two windows add up to those of their stack", () => {
    const [one, other] = [normalEquations(columns, y, 0, 25), normalEquations(columns, y, 25, 60)];
    const sum = {
      gram: one.gram.map((value, k) => value + (other.gram[k] ?? Number.NaN)),
      moment: one.moment.map((value, k) => value + (other.moment[k] ?? Number.NaN)),
      square: one.square + other.square,
      rows: one.rows + other.rows,
    };
    const whole = normalEquations(columns, y);
    expect(sum.rows).toBe(60);
    expect(sum.square / whole.square).toBeCloseTo(1, 14);
    sum.gram.forEach((value, k) => {
      expect(value).toBeCloseTo(whole.gram[k] ?? Number.NaN, 9);
    });
    const [fromSum, fromWhole] = [sum, whole].map(solveNormalEquations);
    fromSum?.forEach((value, j) => {
      expect(value).toBeCloseTo(fromWhole?.[j] ?? Number.NaN, 11);
    });
  });

  it("are not solved where the columns depend on each other or one is 0", () => {
    const x = Float64Array.of(1, 2, 3);
    expect(solveNormalEquations(normalEquations([x, x.map((v) => 2 * v)], x))).toBeNull();
    expect(solveNormalEquations(normalEquations([new Float64Array(3)], x))).toBeNull();
    expect(solveNormalEquations(emptyNormalEquations(2))).toBeNull();
  });
});
