import { describe, expect, it } from "vitest";
import { dotsPath, linePath } from "./path.ts";

const range = { left: 0, right: 2, low: -1, high: 1 };

describe("a path through values", () => {
  it("puts the range's corners on the box's corners", () => {
    expect(linePath([0, 2], [-1, 1], range, 100, 40)).toBe("M0.0 40.0L100.0 0.0");
  });

  it("breaks where a value is missing", () => {
    expect(linePath([0, 1, 2], [0, Number.NaN, 0], range, 100, 40)).toBe("M0.0 20.0M100.0 20.0");
  });

  it("draws points as strokes of no length", () => {
    expect(dotsPath([0, 1], [0, 1], range, 100, 40)).toBe("M0.0 20.0h0M50.0 0.0h0");
  });
});
