import { describe, expect, it } from "vitest";
import { mean } from "#app/engine/math/moments.ts";
import { movingRms } from "#app/engine/math/moving-rms.ts";
import { readFixture } from "../../../tests/support/read-fixture.ts";

const numpy = readFixture<{ x: number[]; rms_valid_51: number[] }>("moving-rms", "numpy.json");

describe("moving root mean square", () => {
  it("agrees with numpy over 51 samples of a burst in noise, 1e-11", () => {
    const centre = mean(numpy.x);
    const y = movingRms(
      Float64Array.from(numpy.x, (value) => value - centre),
      51,
    );
    expect(numpy.rms_valid_51).toHaveLength(250);
    numpy.rms_valid_51.forEach((value, k) => {
      expect(Math.abs((y[k + 50] ?? Number.NaN) - value)).toBeLessThan(1e-11);
    });
  });

  it("is causal: a pulse shows from its own sample on, for one span", () => {
    const x = new Float64Array(12);
    x[5] = 2;
    const y = movingRms(x, 4);
    expect([...y]).toEqual([Number.NaN, Number.NaN, Number.NaN, 0, 0, 1, 1, 1, 1, 0, 0, 0]);
  });

  it("has no value where the signal is shorter than the span or a sample is missing", () => {
    expect([...movingRms(Float64Array.of(1, 2), 3)]).toEqual([Number.NaN, Number.NaN]);
    expect([...movingRms(Float64Array.of(3, Number.NaN, 4, 4), 2)]).toEqual([
      Number.NaN,
      Number.NaN,
      Number.NaN,
      4,
    ]);
    expect(() => movingRms(Float64Array.of(1), 0)).toThrow(RangeError);
  });
});
