import { describe, expect, it } from "vitest";
import type { RecordingMap } from "./recording.ts";
import { mapForSide, rememberMap, rigMapSchema } from "./rig-map.ts";

function mapWith(sign: 1 | -1, axisName = "FE"): RecordingMap {
  const channel = { unit: "deg" as const, gain: 1, offset: 0, sign };
  return {
    table: { separator: "auto", decimal: "auto", header_row: "auto" },
    time: { column: "t", unit: "ms" },
    axes: [
      {
        name: axisName,
        angle: { ...channel, column: `ang_${axisName}` },
        torque: { ...channel, column: `trq_${axisName}`, unit: "N.m" },
      },
    ],
    trigger: null,
    emg: [],
  };
}

describe("the channel map that a rig remembers", () => {
  it("gives back the same map for the same side", () => {
    const rig = rememberMap(null, mapWith(-1), "left");
    expect(rigMapSchema.parse(rig)).toEqual(rig);
    expect(mapForSide(rig, "left", ["FE"])).toEqual({ map: mapWith(-1), unsure: [] });
  });

  it("proposes the opposite sign for a side it has not seen, and says that it is unsure", () => {
    const rig = rememberMap(null, mapWith(1), "right");
    expect(mapForSide(rig, "left", ["FE"])).toEqual({ map: mapWith(-1), unsure: ["FE"] });
  });

  it("keeps the other side's sign when a side is taken in", () => {
    const rig = rememberMap(rememberMap(null, mapWith(1), "right"), mapWith(1), "left");
    expect(rig.axes[0]?.angle.sign).toEqual({ left: 1, right: 1 });
  });

  it("forgets the other side's sign when the column is another one", () => {
    const renamed = mapWith(-1);
    renamed.axes[0] = {
      ...mapWith(-1).axes[0],
      name: "FE",
      angle: { column: "angle2", unit: "deg", gain: 1, offset: 0, sign: -1 },
      torque: { column: "trq_FE", unit: "N.m", gain: 1, offset: 0, sign: -1 },
    };
    const rig = rememberMap(rememberMap(null, mapWith(1), "right"), renamed, "left");
    expect(rig.axes[0]?.angle.sign).toEqual({ left: -1, right: null });
    expect(rig.axes[0]?.torque.sign).toEqual({ left: -1, right: 1 });
  });

  it("keeps an axis that the last recording does not have", () => {
    const rig = rememberMap(rememberMap(null, mapWith(1, "RUD"), "right"), mapWith(1), "right");
    expect(rig.axes.map((axis) => axis.name)).toEqual(["FE", "RUD"]);
    expect(mapForSide(rig, "right", ["RUD"]).map).toEqual(mapWith(1, "RUD"));
  });
});
