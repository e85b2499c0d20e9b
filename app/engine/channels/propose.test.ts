import { describe, expect, it } from "vitest";
import { proposeChannels } from "#app/engine/channels/propose.ts";
import type { TablePreview } from "#app/engine/types.ts";

const FE = { name: "FE", label: "flexion–extension" };
const RUD = { name: "RUD", label: "radial–ulnar deviation" };

/** Columns as `name` or `name|unit`; time in steps of 1 first, then values that wander. */
function previewOf(columns: string[], step = 1): TablePreview {
  return {
    dialect: { encoding: "utf-8", separator: ",", decimal: ".", headerLine: 1, unitsLine: null },
    header: columns.map((column) => column.split("|")[0] as string),
    units: columns.map((column) => column.split("|")[1] ?? ""),
    rows: Array.from({ length: 20 }, (_, i) =>
      columns.map((column, c) =>
        /note|side/.test(column) ? "left" : String(c === 0 ? i * step : Math.sin(i * (c + 1))),
      ),
    ),
    preamble: [],
    flags: [],
  };
}

function propose(columns: string[], axes = [FE], step = 1) {
  return proposeChannels(previewOf(columns, step), axes);
}

function named(columns: string[], axes = [FE]) {
  const { time, axes: found, trigger, emg } = propose(columns, axes);
  return {
    time: time?.column ?? null,
    angles: found.map(({ angle }) => angle?.column ?? null),
    torques: found.map(({ torque }) => torque?.column ?? null),
    limbs: found.map(({ limbAngle }) => limbAngle?.column ?? null),
    trigger,
    emg: emg.map(({ column }) => column),
  };
}

describe("proposeChannels", () => {
  it("maps one axis in the commonest habit, and is certain where name and unit agree", () => {
    expect(propose(["t|ms", "ang_fe|deg", "trq_fe|N.m", "trig", "emg_ecr|mV"])).toEqual({
      time: { column: "t", unit: "ms", certain: true },
      axes: [
        {
          name: "FE",
          angle: { column: "ang_fe", unit: "deg", certain: true },
          torque: { column: "trq_fe", unit: "N.m", certain: true },
          limbAngle: null,
        },
      ],
      trigger: "trig",
      emg: [{ column: "emg_ecr", unit: "mV", muscle: "extensor carpi radialis", certain: true }],
    });
  });

  it.each([
    ["Time (s)|s", "Angle (deg)|deg", "Torque (N.m)|N.m"],
    ["time", "theta", "torque"],
    ["timestamp", "Position", "Moment"],
    ["t_ms", "angle_deg", "torque_Nm"],
    ["t", "θ", "τ"],
    ["t", "theta", "T"],
    ["Zeit|s", "Winkel|°", "Drehmoment|Nm"],
    ["Time", "AngleFE", "TorqueFE"],
    ["time_s", "flexion_angle", "flexion_torque"],
    ["T", "ANG_FE", "TRQ_FE"],
  ])("reads the names %s, %s, %s", (time, angle, torque) => {
    const bare = (column: string) => column.split("|")[0];
    expect(named([time, angle, torque])).toMatchObject({
      time: bare(time),
      angles: [bare(angle)],
      torques: [bare(torque)],
    });
  });

  it("tells axes apart by their names, the words of their labels or the words' first letters", () => {
    for (const columns of [
      ["t", "ang_rud", "trq_rud", "ang_fe", "trq_fe"],
      ["t", "AngleRUD", "TorqueRUD", "AngleFE", "TorqueFE"],
      ["t", "radial_angle", "ulnar_torque", "ext_angle", "flex_torque"],
    ]) {
      expect(named(columns, [FE, RUD])).toMatchObject({
        angles: [columns[3], columns[1]],
        torques: [columns[4], columns[2]],
      });
    }
    const byLabel = [
      { name: "wrist 1", label: "flexion–extension" },
      { name: "wrist 2", label: "radial–ulnar deviation" },
    ];
    expect(named(["t", "ang_rud", "trq_rud", "ang_fe", "trq_fe"], byLabel)).toMatchObject({
      angles: ["ang_fe", "ang_rud"],
    });
  });

  it("goes by order, uncertain, where there are as many columns as axes and none names one", () => {
    const found = propose(["t|ms", "ang1|deg", "ang2|deg", "trq1|N.m", "trq2|N.m"], [FE, RUD]);
    expect(found.axes.map(({ angle, torque }) => [angle?.column, torque?.column])).toEqual([
      ["ang1", "trq1"],
      ["ang2", "trq2"],
    ]);
    expect(found.axes.every(({ angle }) => angle?.certain === false)).toBe(true);
  });

  it("gives the one column that is left to the one axis that is left, uncertain", () => {
    const columns = ["t|ms", "ang_fe|deg", "ang_ru|deg", "trq_fe|N.m", "trq_ru|N.m"];
    const found = propose(columns, [FE, RUD]);
    expect(found.axes[1]).toMatchObject({
      angle: { column: "ang_ru", certain: false },
      torque: { column: "trq_ru", certain: false },
    });
    expect(named([...columns, "ang_x|deg"], [FE, RUD]).angles).toEqual(["ang_fe", null]);
  });

  it("leaves an axis open that the file does not show", () => {
    expect(named(["t", "ang_fe", "trq_fe"], [FE, RUD])).toMatchObject({
      angles: ["ang_fe", null],
      torques: ["trq_fe", null],
    });
    expect(named(["t", "ang", "trq"], [FE, RUD])).toMatchObject({ angles: [null, null] });
  });

  it("takes a second angle of the limb for that, and a lone one for the axis's", () => {
    expect(named(["t", "gonio_fe", "ang_fe", "trq_fe"])).toMatchObject({
      angles: ["ang_fe"],
      limbs: ["gonio_fe"],
    });
    expect(named(["t", "limb_angle", "trq_fe"])).toMatchObject({
      angles: ["limb_angle"],
      limbs: [null],
    });
  });

  it("passes velocities, commands and references by", () => {
    expect(
      named(["t", "ang_vel_fe", "ang_ref_fe", "torque_cmd_fe", "ang_fe", "trq_fe"]),
    ).toMatchObject({ angles: ["ang_fe"], torques: ["trq_fe"] });
    expect(named(["t", "vel|deg/s", "command|deg", "x|deg", "y|N.m"])).toMatchObject({
      angles: ["x"],
      torques: ["y"],
    });
  });

  it("goes by units where names say nothing, uncertain", () => {
    const found = propose(["ch0|ms", "ch1|deg", "ch2|N.m"]);
    expect(found.time).toEqual({ column: "ch0", unit: "ms", certain: false });
    expect(found.axes[0]).toMatchObject({
      angle: { column: "ch1", unit: "deg", certain: false },
      torque: { column: "ch2", unit: "N.m", certain: false },
    });
  });

  it("leaves units open that nothing states", () => {
    expect(propose(["t", "ang", "trq"]).axes[0]).toMatchObject({
      angle: { unit: null, certain: false },
      torque: { unit: null, certain: false },
    });
  });

  it.each([
    [0.001, "s"],
    [0.0005, "s"],
    [1, "ms"],
    [0.1, "ms"],
    [1000, "us"],
    [1e9, null],
  ] as const)("takes steps of %d for a time in %s, uncertain", (step, unit) => {
    expect(propose(["t", "ang", "trq"], [FE], step).time).toEqual({
      column: "t",
      unit,
      certain: false,
    });
  });

  it("takes the first column for time where it grows evenly, and none where nothing does", () => {
    expect(named(["x", "ang", "trq"]).time).toBe("x");
    expect(propose(["ang", "trq"], [FE], 0).time).toBeNull();
  });

  it("names muscles, and takes an unknown one as it is written", () => {
    const { emg } = propose(["t", "ang", "trq", "EMG_TA|uV", "emg peroneus longus", "sol|mV"]);
    expect(emg).toEqual([
      { column: "EMG_TA", unit: "uV", muscle: "tibialis anterior", certain: true },
      { column: "emg peroneus longus", unit: null, muscle: "peroneus longus", certain: false },
      { column: "sol", unit: "mV", muscle: "soleus", certain: true },
    ]);
  });

  it("proposes no column that holds text or whose name stands twice", () => {
    expect(named(["t", "note_angle", "ang", "ang", "trq"])).toMatchObject({ angles: [null] });
  });
});
