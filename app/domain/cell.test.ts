import { describe, expect, it } from "vitest";
import { axesOfChannelMap, type CellRecording, cellKey, cellsOf, leastAdvanced } from "./cell.ts";

function recording(change: Partial<CellRecording>): CellRecording {
  return {
    recordingId: "r1",
    participantId: "w01",
    conditionId: "bare",
    postureId: "seated",
    axes: ["FE"],
    state: "recorded",
    ...change,
  };
}

describe("the state of a cell", () => {
  it("is the least advanced of its recordings", () => {
    expect(leastAdvanced(["approved", "draft", "submitted"])).toBe("draft");
    expect(leastAdvanced(["approved", "returned"])).toBe("returned");
    expect(leastAdvanced(["approved", "approved"])).toBe("approved");
  });

  it("is nothing where there is no recording", () => {
    expect(leastAdvanced([])).toBe("nothing");
    expect(cellsOf([]).get(cellKey("w01", "bare", "FE"))).toBeUndefined();
  });

  it("counts a recording of two axes in both", () => {
    const cells = cellsOf([
      recording({ recordingId: "r1", axes: ["FE", "RUD"], state: "approved" }),
      recording({ recordingId: "r2", axes: ["FE"], state: "draft" }),
    ]);
    expect(cells.get(cellKey("w01", "bare", "FE"))).toEqual({
      state: "draft",
      recordingIds: ["r1", "r2"],
    });
    expect(cells.get(cellKey("w01", "bare", "RUD"))).toEqual({
      state: "approved",
      recordingIds: ["r1"],
    });
  });

  it("keeps participants and conditions apart even where their ids share letters", () => {
    const cells = cellsOf([
      recording({ participantId: "a", conditionId: "b,c" }),
      recording({ participantId: "a,b", conditionId: "c" }),
    ]);
    expect(cells.size).toBe(2);
  });
});

it("reads no axes from a channel map that is not one", () => {
  expect(axesOfChannelMap("{")).toEqual([]);
  expect(axesOfChannelMap('{"axes":[]}')).toEqual([]);
});
