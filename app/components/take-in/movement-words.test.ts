import { describe, expect, it } from "vitest";
import type { AxisMovement } from "#app/engine/types.ts";
import { describeMovement, stiffnessSign } from "./movement-words.ts";

const axis = { label: "flexion–extension", positive: "extension", negative: "flexion" };

function moved(change: Partial<Extract<AxisMovement, { status: "moved" }>> = {}): AxisMovement {
  return {
    axis: "FE",
    status: "moved",
    onsetS: 1.2355,
    amplitudeDeg: 4.03,
    torqueSign: 1,
    ...change,
  };
}

describe("describeMovement", () => {
  it("says when, how far and which way the first movement went", () => {
    const words = describeMovement(moved(), axis, { angle: 1, torque: 1 });
    expect(words.text).toBe("First movement: at 1.24 s, 4.0° towards extension.");
    expect(words.torque).toBe("The torque rises with it: a spring gives K > 0.");
    expect(words.otherWay).toBe("flexion");
  });

  it("names the other direction once angle and torque are turned, and K stays positive", () => {
    const words = describeMovement(moved(), axis, { angle: -1, torque: -1 });
    expect(words.text).toBe("First movement: at 1.24 s, 4.0° towards flexion.");
    expect(words.stiffness).toBe("positive");
  });

  it("says that K would be negative where only one of the two is turned", () => {
    for (const signs of [
      { angle: 1, torque: -1 },
      { angle: -1, torque: 1 },
    ] as const) {
      const words = describeMovement(moved(), axis, signs);
      expect(words.stiffness).toBe("negative");
      expect(words.torque).toMatch(/K would be negative/);
    }
  });

  it("does not guess where nothing moved", () => {
    const words = describeMovement({ axis: "FE", status: "still" }, axis, { angle: 1, torque: 1 });
    expect(words.text).toBe("No movement was found.");
    expect(words.otherWay).toBeNull();
    expect(words.stiffness).toBe("unclear");
  });
});

describe("stiffnessSign", () => {
  it("is that of the torque in the file, turned as often as angle and torque are", () => {
    expect(stiffnessSign(moved({ torqueSign: -1 }), { angle: 1, torque: 1 })).toBe("negative");
    expect(stiffnessSign(moved({ torqueSign: -1 }), { angle: 1, torque: -1 })).toBe("positive");
    expect(stiffnessSign(moved({ torqueSign: 0 }), { angle: -1, torque: 1 })).toBe("unclear");
  });
});
