import { describe, expect, it } from "vitest";
import { columnsOf, toSignals } from "#app/engine/channels/signals.ts";
import type { Protocol, Table, Unit } from "#app/engine/types.ts";

const gap = Number.NaN;

const PROTOCOL: Protocol = {
  version: 1,
  kind: "transient",
  table: { separator: "auto", decimal: "auto", header_row: "auto" },
  time: { column: "t", unit: "ms" },
  axes: [
    {
      name: "FE",
      positive: "extension",
      negative: "flexion",
      angle: { column: "ang", unit: "deg", gain: 1, offset: 0, sign: 1 },
      torque: { column: "trq", unit: "N.m", gain: 1, offset: 0, sign: 1 },
    },
  ],
  emg: [],
  filter: null,
  derivative: "central",
  onset: {
    from: "angle",
    trigger_column: null,
    cutoff_hz: 50,
    min_separation_ms: 500,
    expected_amplitude_deg: null,
    expected_duration_ms: null,
  },
  reflex_limit_ms: 50,
  background: { target: null, tolerance: null },
  baseline_ms: [-50, 0],
  window_ms: [0, 100],
  model: { terms: ["K", "B", "I"], fixed: {}, nonnegative: false },
  rig: { K: 0, B: 0, I: 0 },
  lag_ms: 0,
  max_filled_samples: 0,
  uncertainty: { level: 0.95, resamples: 2000, seed: 1 },
};

const [FE] = PROTOCOL.axes as [Protocol["axes"][number]];

function axisWith(change: Partial<Protocol["axes"][number]>): Protocol["axes"] {
  return [{ ...FE, ...change }];
}

const AXIS_FROM_PLATE: Protocol["axes"][number] = {
  name: "ankle",
  positive: "dorsiflexion",
  negative: "plantarflexion",
  angle: { column: "ang", unit: "deg", gain: 1, offset: 0, sign: 1 },
  torque_from: {
    force_plate: {
      force: ["fx", "fy", "fz"],
      moment: ["mx", "my", "mz"],
      force_unit: "kN",
      moment_unit: "N.mm",
      joint_to_plate_m: [0.04, -0.02, 0.11],
      about: "x",
    },
  },
};

/** A table of 40 rows; columns not given wander so that nothing is constant. */
function tableOf(columns: Record<string, (i: number) => number>, units: string[] = []): Table {
  const names = Object.keys(columns);
  return {
    dialect: { encoding: "utf-8", separator: ",", decimal: ".", headerLine: 1, unitsLine: null },
    header: names,
    units: names.map((_, i) => units[i] ?? ""),
    rows: 40,
    columns: new Map(
      names.map((name) => [
        name,
        Float64Array.from({ length: 40 }, (_, i) => columns[name]?.(i) ?? gap),
      ]),
    ),
    firstDataLine: 2,
    skippedLines: [],
    flags: [],
  };
}

const t = (i: number): number => i;
const ang = (i: number): number => i / 8;
const trq = (i: number): number => 2 - i / 4;
const plain = tableOf({ t, ang, trq });

function codesOf({ flags }: { flags: { code: string }[] }): string[] {
  return flags.map(({ code }) => code);
}

describe("columnsOf", () => {
  it("names every mapped column once: time, axes, limb angle, force plate, EMG, trigger", () => {
    const protocol: Protocol = {
      ...PROTOCOL,
      axes: [
        { ...FE, limb_angle: { column: " limb ", unit: "deg", gain: 1, offset: 0, sign: 1 } },
        AXIS_FROM_PLATE,
      ],
      emg: [{ muscle: "soleus", column: "emg", unit: "mV" }],
      onset: { ...PROTOCOL.onset, from: "trigger", trigger_column: "trig" },
    };
    expect(columnsOf(protocol)).toEqual([
      "t",
      "ang",
      "trq",
      "limb",
      "fx",
      "fy",
      "fz",
      "mx",
      "my",
      "mz",
      "emg",
      "trig",
    ]);
    expect(columnsOf({ ...PROTOCOL, time: { rate_hz: 1000 } })).toEqual(["ang", "trq"]);
  });
});

describe("toSignals", () => {
  it("calibrates: sign · (raw − offset) · gain, then SI", () => {
    const axes = axisWith({
      angle: { column: "ang", unit: "deg", gain: 2, offset: 1, sign: -1 },
      torque: { column: "trq", unit: "N.cm", gain: 50, offset: -1, sign: 1 },
    });
    const { axes: found } = toSignals(plain, { ...PROTOCOL, axes });
    expect(found[0]?.angle.si[16]).toBeCloseTo((-(16 / 8 - 1) * 2 * Math.PI) / 180, 15);
    expect(found[0]?.torqueNm[4]).toBeCloseTo((2 - 1 + 1) * 0.5, 15);
    expect(found[0]?.torqueChannels[0]?.si).toBe(found[0]?.torqueNm);
  });

  it("puts the samples on the time of the file", () => {
    const found = toSignals(tableOf({ t: (i) => 500 + i / 2, ang, trq }), PROTOCOL);
    expect(found).toMatchObject({ samples: 40, rateHz: 2000, durationS: 0.0195, gaps: 0 });
    expect(found.timeS[1]).toBe(0.5005);
    expect(found.segments).toEqual([{ start: 0, end: 40 }]);
    expect(found.flags).toEqual([]);
  });

  it("takes a stated rate instead of a column", () => {
    const found = toSignals(tableOf({ ang, trq }), { ...PROTOCOL, time: { rate_hz: 500 } });
    expect(found).toMatchObject({ rateHz: 500, durationS: 0.078 });
    expect(found.timeS[10]).toBe(0.02);
  });

  it("counts gaps, duplicates and jitter and flags them", () => {
    const wild = (i: number) => i + (i > 9 ? 5 : 0) - (i > 19 ? 1 : 0) + (i === 30 ? 0.3 : 0);
    const found = toSignals(tableOf({ t: wild, ang, trq }), PROTOCOL);
    expect(found).toMatchObject({ gaps: 1, duplicates: 1, gapBefore: [10], duplicateBefore: [20] });
    expect(codesOf(found)).toEqual(["jitter", "gaps", "duplicates"]);
    expect(found.segments.map(({ start, end }) => [start, end])).toEqual([
      [0, 10],
      [10, 20],
      [20, 40],
    ]);
  });

  it("names the line on which time runs backwards, lines without rows counted", () => {
    const table = { ...tableOf({ t: (i) => (i === 20 ? 3 : i), ang, trq }), skippedLines: [5, 6] };
    expect(() => toSignals(table, PROTOCOL)).toThrow(
      expect.objectContaining({ name: "unreadable", line: 24 }),
    );
  });

  it("counts missing cells over the mapped columns, each column once", () => {
    const axes = axisWith({ limb_angle: FE.angle });
    const table = tableOf({
      t: (i) => (i === 3 ? gap : i),
      ang: (i) => (i > 30 && i < 33 ? gap : i),
      trq,
      other: () => gap,
    });
    const found = toSignals(table, { ...PROTOCOL, axes });
    expect(found.missing).toBe(3);
    expect(found.axes[0]?.angle.si[31]).toBeNaN();
    expect(found.segments).toHaveLength(2);
  });

  it("fills short runs before calibration where the protocol says so, and still counts them", () => {
    const table = tableOf({
      t: (i) => (i === 5 ? gap : i),
      ang: (i) => (i === 10 || i === 11 ? gap : 2 * i),
      trq: (i) => (i > 20 && i < 24 ? gap : i),
    });
    const found = toSignals(table, { ...PROTOCOL, max_filled_samples: 2 });
    const [axis] = found.axes;
    expect(axis?.angle.si[11]).toBeCloseTo((22 * Math.PI) / 180, 14);
    expect(axis?.torqueNm[22]).toBeNaN();
    expect(found.missing).toBe(6);
    expect(found.segments).toEqual([{ start: 0, end: 40 }]);
    // A filled stamp is marked on the angle of every axis.
    expect([5, 10, 11, 12].map((i) => axis?.angle.filled?.[i])).toEqual([1, 1, 1, 0]);
    expect(axis?.torqueChannels[0]?.filled).toBeNull();
  });

  it("knows raw extremes, runs at them and channels of one value", () => {
    const table = tableOf({ t, ang: (i) => Math.min(i, 30), trq: () => 4 });
    const found = toSignals(table, PROTOCOL);
    expect(found.axes[0]?.angle).toMatchObject({ rawMin: 0, rawMax: 30, constant: false });
    expect([...(found.axes[0]?.angle.clippedRun ?? [])].lastIndexOf(0)).toBe(29);
    expect(found.axes[0]?.torqueChannels[0]?.constant).toBe(true);
    expect(found.flags).toEqual([
      {
        code: "constant_channel",
        text: "A channel holds one value throughout the recording: trq.",
      },
    ]);
  });

  it("lets the protocol's unit win over the file's and flags what differs", () => {
    const found = toSignals(tableOf({ t, ang, trq }, ["ms", "rad", "Nm"]), PROTOCOL);
    expect(found.axes[0]?.angle.si[8]).toBeCloseTo(Math.PI / 180, 15);
    expect(found.flags).toEqual([
      {
        code: "unit_mismatch",
        text: "The file states another unit than the protocol, whose unit is used: ang (rad, not deg).",
      },
    ]);
  });

  it("takes a unit that is spelt otherwise, left out or - for no mismatch", () => {
    for (const units of [
      ["msec", "°", "N·m"],
      ["", "", ""],
      ["-", "-", "-"],
    ]) {
      expect(toSignals(tableOf({ t, ang, trq }, units), PROTOCOL).flags).toEqual([]);
    }
    expect(codesOf(toSignals(tableOf({ t, ang, trq }, ["ms", "counts"]), PROTOCOL))).toEqual([
      "unit_mismatch",
    ]);
  });

  it("keeps the flags of the reading", () => {
    const table = { ...plain, flags: [{ code: "truncated", text: "…" }] };
    expect(codesOf(toSignals(table, PROTOCOL))).toEqual(["truncated"]);
  });

  it("makes an axis's torque from a force plate, in its units", () => {
    const table = tableOf({
      t,
      ang,
      fx: () => 0.012,
      fy: () => -0.007,
      fz: (i) => (i === 7 ? gap : 0.64),
      mx: () => 3000,
      my: () => -18000,
      mz: () => 1500,
    });
    const [axis] = toSignals(table, { ...PROTOCOL, axes: [AXIS_FROM_PLATE] }).axes;
    // Worked by hand: 3 + (−0.02 · 640 − 0.11 · −7).
    expect(axis?.torqueNm[0]).toBeCloseTo(-9.03, 12);
    expect(axis?.torqueNm[7]).toBeNaN();
    expect(axis?.torqueChannels.map(({ column }) => column)).toEqual([
      "fx",
      "fy",
      "fz",
      "mx",
      "my",
      "mz",
    ]);
    expect(axis?.torqueChannels[2]?.si[0]).toBe(640);
  });

  it("reads limb angle, EMG and trigger", () => {
    const protocol: Protocol = {
      ...PROTOCOL,
      axes: axisWith({ limb_angle: { column: "limb", unit: "mrad", gain: 1, offset: 0, sign: 1 } }),
      emg: [
        { muscle: "soleus", column: "e1", unit: "mV" },
        { muscle: "tibialis anterior", column: "e2", unit: "uV", reference: 0.0005 },
        { muscle: "peroneus", column: "e3", unit: "1" },
      ],
      onset: { ...PROTOCOL.onset, from: "trigger", trigger_column: "trig" },
    };
    const table = tableOf({
      t,
      ang,
      trq,
      limb: ang,
      e1: (i) => i,
      e2: (i) => 10 * i,
      e3: (i) => i / 100,
      trig: (i) => (i > 20 ? 5 : 0),
    });
    const found = toSignals(table, protocol);
    expect(found.axes[0]?.limbAngle?.si[8]).toBe(0.001);
    expect(found.emg.map(({ muscle, unit }) => [muscle, unit])).toEqual([
      ["soleus", "V"],
      ["tibialis anterior", "1"],
      ["peroneus", "1"],
    ]);
    expect(found.emg[0]?.channel.si[5]).toBe(0.005);
    expect(found.emg[1]?.channel.si[5]).toBeCloseTo(0.1, 15);
    expect(found.emg[2]?.channel.si[5]).toBe(0.05);
    expect([found.trigger?.[20], found.trigger?.[21]]).toEqual([0, 5]);
  });

  it("refuses fewer than 30 samples", () => {
    expect(() => toSignals({ ...plain, rows: 29 }, PROTOCOL)).toThrow(
      expect.objectContaining({
        name: "unreadable",
        message: "The recording has 29 samples; at least 30 are needed.",
      }),
    );
  });

  it.each<[string, Partial<Protocol>]>([
    ["time.unit", { time: { column: "t", unit: "m" } }],
    ["axes.0.angle.unit", { axes: axisWith({ angle: { ...FE.angle, unit: "N.m" } }) }],
    ["axes.0.torque.unit", { axes: axisWith({ torque: { ...FE.angle, column: "trq" } }) }],
    ["axes.0.limb_angle.unit", { axes: axisWith({ limb_angle: { ...FE.angle, unit: "mm" } }) }],
    [
      "axes.1.angle.unit",
      { axes: [FE, { ...FE, name: "RUD", angle: { ...FE.angle, unit: "1" } }] },
    ],
    ["emg.0.unit", { emg: [{ muscle: "soleus", column: "e", unit: "Pa" }] }],
    ["emg.0.unit", { emg: [{ muscle: "soleus", column: "e", unit: "1", reference: 0.1 }] }],
  ])("refuses a unit of the wrong kind and names the field %s", (field, change) => {
    expect(() => toSignals(plain, { ...PROTOCOL, ...change })).toThrow(
      expect.objectContaining({ name: "protocol", field }),
    );
  });

  it.each<["force_unit" | "moment_unit", Unit]>([
    ["force_unit", "N.m"],
    ["moment_unit", "N"],
  ])("refuses a force plate's %s of the wrong kind", (field, unit) => {
    const { force_plate } = AXIS_FROM_PLATE.torque_from ?? {};
    if (force_plate === undefined) throw new Error("there is no plate");
    const torque_from = { force_plate: { ...force_plate, [field]: unit } };
    const axes = [{ ...AXIS_FROM_PLATE, torque_from }];
    expect(() => toSignals(plain, { ...PROTOCOL, axes })).toThrow(
      expect.objectContaining({ field: `axes.0.torque_from.force_plate.${field}` }),
    );
  });
});
