import { describe, expect, it } from "vitest";
import { momentAboutJoint, type Vector } from "#app/engine/channels/force-plate.ts";
import numpy from "../../../fixtures/reading-force-plate/numpy.json";

const columns = (vector: number[]) =>
  [0, 1, 2].map((i) => Float64Array.of(vector[i] as number)) as [
    Float64Array,
    Float64Array,
    Float64Array,
  ];

function momentOf({ r, force, moment }: { r: number[]; force: number[]; moment: number[] }) {
  return (["x", "y", "z"] as const).map(
    (about) =>
      momentAboutJoint(columns(force), columns(moment), r as unknown as Vector, about)[0] as number,
  );
}

describe("momentAboutJoint", () => {
  it("is M + r × F (numpy.cross, 1e-12 of the largest term)", () => {
    expect(numpy.cases.length).toBeGreaterThan(5);
    for (const entry of numpy.cases) {
      const scale = Math.max(...entry.moment.map(Math.abs), ...entry.force.map(Math.abs));
      momentOf(entry).forEach((found, i) => {
        expect(Math.abs(found - (entry.joint_moment[i] as number))).toBeLessThan(1e-12 * scale);
      });
    }
  });

  it("is 0 for a pure force through the joint's centre (statics)", () => {
    for (const found of momentOf(numpy.pure_force)) expect(Math.abs(found)).toBeLessThan(1e-12);
  });

  it("is missing where a component that enters is missing", () => {
    const [, forceY, forceZ] = columns([1, Number.NaN, 3]);
    const plate = columns([4, 5, 6]);
    const force = [Float64Array.of(1), forceY, forceZ] as const;
    expect(momentAboutJoint(force, plate, [0.1, 0.2, 0.3], "x")[0]).toBeNaN();
    expect(momentAboutJoint(force, plate, [0.1, 0.2, 0.3], "y")[0]).toBeCloseTo(5.0, 12);
  });
});
