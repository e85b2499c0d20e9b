import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { parabolaVertex } from "#app/engine/math/parabola.ts";

describe("vertex of a parabola through three points", () => {
  it("is found wherever the parabola has it", () => {
    fc.assert(
      fc.property(
        fc.double({ min: -3, max: 3, noNaN: true }),
        fc.double({ min: 0.1, max: 50, noNaN: true }),
        fc.double({ min: -10, max: 10, noNaN: true }),
        (at, curvature, level) => {
          const y = (x: number) => level + curvature * (x - at) ** 2;
          const vertex = parabolaVertex(y(-1), y(0), y(1));
          expect(vertex?.offset).toBeCloseTo(at, 9);
          expect(vertex?.value).toBeCloseTo(level, 9);
        },
      ),
      { numRuns: 200, seed: 8 },
    );
  });

  it("is not there on a straight line", () => {
    expect(parabolaVertex(1, 2, 3)).toBeNull();
    expect(parabolaVertex(4, 4, 4)).toBeNull();
  });
});
