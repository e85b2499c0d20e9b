import { describe, expect, it } from "vitest";
import { recordingMapSchema } from "#app/domain/recording.ts";
import { type RigMap, rememberMap } from "#app/domain/rig-map.ts";
import type { ProposedMap, TableProtocol } from "#app/engine/types.ts";
import {
  confirmMovement,
  draftFromColumns,
  draftFromRig,
  isConfirmed,
  isSignGuessed,
  type MapDraft,
  problemsOfMap,
  recordingMapOf,
  rolesOfColumns,
  turnMovement,
  turnTorque,
} from "./map-draft.ts";

const AUTO: TableProtocol = { separator: "auto", decimal: "auto", header_row: "auto" };
const HEADER = ["t", "ang", "trq", "trig"];
const AXES = [
  { name: "FE", label: "flexion–extension" },
  { name: "RUD", label: "radial–ulnar deviation" },
];
const around = { header: HEADER, axes: AXES, needsTrigger: false };

const PROPOSED: ProposedMap = {
  time: { column: "t", unit: "ms", certain: true },
  axes: [
    {
      name: "FE",
      angle: { column: "ang", unit: "deg", certain: true },
      torque: { column: "trq", unit: "N.m", certain: false },
      limbAngle: null,
    },
    { name: "RUD", angle: null, torque: null, limbAngle: null },
  ],
  trigger: "trig",
  emg: [],
};

function draft(): MapDraft {
  return draftFromColumns(PROPOSED, ["FE", "RUD"], null);
}

function axisOf(map: MapDraft) {
  const [axis] = map.axes;
  if (!axis) throw new Error("The draft has no axis.");
  return axis;
}

function change(map: MapDraft, to: Partial<MapDraft["axes"][number]>): MapDraft {
  const [first, ...rest] = map.axes;
  return { ...map, axes: [{ ...(first as MapDraft["axes"][number]), ...to }, ...rest] };
}

describe("draftFromColumns", () => {
  it("takes what the columns suggest and leaves the axis that they do not show", () => {
    const map = draft();
    expect(problemsOfMap(map, around)).toEqual([]);
    expect(recordingMapSchema.parse(recordingMapOf(map, AUTO, "right"))).toEqual({
      table: AUTO,
      time: { column: "t", unit: "ms" },
      axes: [
        {
          name: "FE",
          angle: { column: "ang", unit: "deg", gain: 1, offset: 0, sign: 1 },
          torque: { column: "trq", unit: "N.m", gain: 1, offset: 0, sign: 1 },
        },
      ],
      trigger: "trig",
      emg: [],
    });
  });

  it("marks what it takes by a name alone, until a person chooses", () => {
    expect(axisOf(draft()).angle.isGuess).toBe(false);
    expect(axisOf(draft()).torque.isGuess).toBe(true);
  });

  it("maps only the axis that the file's name tells of", () => {
    const map = draftFromColumns(PROPOSED, ["FE", "RUD"], "RUD");
    expect(map.axes.map(({ name, mapped }) => [name, mapped])).toEqual([
      ["FE", false],
      ["RUD", true],
    ]);
    expect(problemsOfMap(map, around).map(({ short }) => short)).toEqual([
      "angle of radial–ulnar deviation",
      "torque of radial–ulnar deviation",
    ]);
  });

  it("asks for everything where the columns suggest nothing", () => {
    const map = draftFromColumns({ time: null, axes: [], trigger: null, emg: [] }, ["FE"], null);
    expect(problemsOfMap(map, around).map(({ field }) => field)).toEqual([
      "time",
      "timeUnit",
      "FE.angle.column",
      "FE.torque.column",
    ]);
  });
});

describe("draftFromRig", () => {
  const remembered: RigMap = rememberMap(
    null,
    recordingMapOf(turnMovement(draft(), "FE", "right"), AUTO, "right"),
    "right",
  );

  it("gives the remembered signs to the side that was seen, and the opposite ones to the other", () => {
    const map = draftFromRig(remembered, HEADER, ["FE", "RUD"]);
    if (map === null) throw new Error("The remembered map fits.");
    expect(axisOf(map).angle.sign).toEqual({ right: -1, left: 1 });
    expect(isSignGuessed(axisOf(map), "left")).toBe(true);
    expect(isSignGuessed(axisOf(map), "right")).toBe(false);
    expect(recordingMapOf(map, AUTO, "right").axes[0]?.torque.sign).toBe(-1);
    expect(map.from).toBe("rig");
  });

  it("is not proposed for a file that lacks one of its columns or has it twice", () => {
    expect(draftFromRig(remembered, ["t", "ang", "trq"], ["FE"])).toBeNull();
    expect(draftFromRig(remembered, [...HEADER, "ang"], ["FE"])).toBeNull();
  });

  it("is not proposed where it holds none of the study's axes", () => {
    expect(draftFromRig(remembered, HEADER, ["DF"])).toBeNull();
  });
});

describe("problemsOfMap", () => {
  it("names each field that is missing or no number", () => {
    const map = { ...draft(), timeFrom: "rate" as const, rateHz: "fast" };
    const bad = change(map, {
      angle: { ...axisOf(map).angle, gain: "0", offset: "x", unit: "" },
    });
    expect(problemsOfMap(bad, around).map(({ field }) => field)).toEqual([
      "rateHz",
      "FE.angle.unit",
      "FE.angle.gain",
      "FE.angle.offset",
    ]);
  });

  it("reads a decimal comma in gain and rate", () => {
    const map = change({ ...draft(), timeFrom: "rate", rateHz: "2000,5" }, {});
    const torque = { ...axisOf(map).torque, gain: "0,5" };
    const made = recordingMapOf(change(map, { torque }), AUTO, "left");
    expect(made.time).toEqual({ rate_hz: 2000.5 });
    expect(made.axes[0]?.torque.gain).toBe(0.5);
  });

  it("refuses one column for two channels", () => {
    const map = draft();
    const bad = change(map, { torque: { ...axisOf(map).torque, column: "ang" } });
    expect(problemsOfMap(bad, around).map(({ sentence }) => sentence)).toEqual([
      "“ang” is the angle of flexion–extension already: choose another column for the torque of flexion–extension.",
    ]);
  });

  it("says that a column is not in this file, or stands there twice", () => {
    const header = ["t", "t", "trq", "trig"];
    expect(problemsOfMap(draft(), { ...around, header }).map(({ field }) => field)).toEqual([
      "time",
      "FE.angle.column",
    ]);
  });

  it("asks for the trigger where the study's protocol goes by it", () => {
    const map = { ...draft(), trigger: "" };
    expect(problemsOfMap(map, around)).toEqual([]);
    expect(problemsOfMap(map, { ...around, needsTrigger: true })).toHaveLength(1);
  });
});

describe("signs for the tested side", () => {
  it("turns angle and torque together where the limb went the other way", () => {
    const { angle, torque } = axisOf(turnMovement(draft(), "FE", "left"));
    expect([angle.sign, torque.sign]).toEqual([
      { left: -1, right: 1 },
      { left: -1, right: 1 },
    ]);
  });

  it("turns the torque alone where K would be negative", () => {
    const { angle, torque } = axisOf(turnTorque(draft(), "FE", "right"));
    expect([angle.sign.right, torque.sign.right]).toEqual([1, -1]);
  });

  it("holds a confirmation for one side, and only as long as the channels stay", () => {
    const confirmed = confirmMovement(draft(), "FE", "right");
    expect(isConfirmed(axisOf(confirmed), "right")).toBe(true);
    expect(isConfirmed(axisOf(confirmed), "left")).toBe(false);
    expect(isConfirmed(axisOf(turnTorque(confirmed, "FE", "right")), "right")).toBe(false);
    const back = turnTorque(turnTorque(confirmed, "FE", "right"), "FE", "right");
    expect(isConfirmed(axisOf(back), "right")).toBe(true);
  });

  it("proposes the opposite for a side that nobody has seen, and leaves one that was seen", () => {
    const right = confirmMovement(draft(), "FE", "right");
    expect(axisOf(right).angle.sign).toEqual({ right: 1, left: -1 });
    const left = confirmMovement(turnMovement(right, "FE", "left"), "FE", "left");
    expect(axisOf(left).angle.sign).toEqual({ right: 1, left: 1 });
    expect(isConfirmed(axisOf(left), "right")).toBe(true);
  });
});

describe("rolesOfColumns", () => {
  it("says what each column is, with the axis where there are two", () => {
    expect([...rolesOfColumns(draft(), AXES)]).toEqual([
      ["t", "time"],
      ["ang", "angle FE"],
      ["trq", "torque FE"],
      ["trig", "trigger"],
    ]);
    expect(rolesOfColumns(draft(), AXES.slice(0, 1)).get("ang")).toBe("angle");
  });
});
