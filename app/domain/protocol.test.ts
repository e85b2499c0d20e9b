import { describe, expect, it } from "vitest";
import { z } from "zod";
import {
  bothPassesCutoffHz,
  compileProtocol,
  defaultChoices,
  describeChoices,
  ProtocolError,
  parseProtocol,
  protocolSchema,
  readProtocolChoices,
} from "./protocol.ts";
import type { RecordingMap } from "./recording.ts";

type Document = Record<string, unknown>;

const channel = (column: string, unit: string) => ({ column, unit });

function minimal(): Document {
  return {
    version: 1,
    kind: "transient",
    time: { column: "t", unit: "ms" },
    axes: [{ name: "FE", angle: channel("ang", "deg"), torque: channel("trq", "N.m") }],
  };
}

/** `minimal` with one place changed; the path is dotted, undefined takes the key away. */
function changed(path: string, value: unknown, document: Document = minimal()): Document {
  const keys = path.split(".");
  const last = keys.pop() ?? "";
  let place: Document = document;
  for (const key of keys) {
    place[key] ??= {};
    place = place[key] as Document;
  }
  if (value === undefined) delete place[last];
  else place[last] = value;
  return document;
}

function problem(document: unknown): { field: string | null; message: string } {
  try {
    parseProtocol(typeof document === "string" ? document : JSON.stringify(document));
  } catch (error) {
    if (error instanceof ProtocolError) return { field: error.field, message: error.message };
    throw error;
  }
  throw new Error("accepted");
}

describe("a protocol", () => {
  it("has every default of the contract", () => {
    expect(parseProtocol(JSON.stringify(minimal()))).toEqual({
      version: 1,
      kind: "transient",
      table: { separator: "auto", decimal: "auto", header_row: "auto" },
      time: { column: "t", unit: "ms" },
      axes: [
        {
          name: "FE",
          positive: "positive",
          negative: "negative",
          angle: { column: "ang", unit: "deg", gain: 1, offset: 0, sign: 1 },
          torque: { column: "trq", unit: "N.m", gain: 1, offset: 0, sign: 1 },
        },
      ],
      emg: [],
      filter: { family: "butterworth", order: 2, cutoff_hz: 20 },
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
    });
  });

  it("fills defaults inside what is given in part", () => {
    const document = changed("filter", { cutoff_hz: 50 });
    document.model = { nonnegative: true };
    document.rig = { I: 0.002 };
    const protocol = parseProtocol(JSON.stringify(document));
    expect(protocol.filter).toEqual({ family: "butterworth", order: 2, cutoff_hz: 50 });
    expect(protocol.model).toEqual({ terms: ["K", "B", "I"], fixed: {}, nonnegative: true });
    expect(protocol.rig).toEqual({ K: 0, B: 0, I: 0.002 });
  });

  it("takes null as no filter", () => {
    expect(parseProtocol(JSON.stringify(changed("filter", null))).filter).toBeNull();
  });

  it("takes a rig for each axis by its name, 0 where one is not named", () => {
    const document = minimal();
    (document.axes as Document[]).push({
      name: "constructor",
      angle: channel("a2", "rad"),
      torque: channel("t2", "N.mm"),
    });
    document.rig = { FE: { K: 1, B: 2, I: 3 } };
    expect(parseProtocol(JSON.stringify(document)).rig).toEqual({
      FE: { K: 1, B: 2, I: 3 },
      constructor: { K: 0, B: 0, I: 0 },
    });
  });

  it("takes a force plate, a limb angle, EMG, a trigger and a stated rate", () => {
    const document = minimal();
    document.time = { rate_hz: 1000 };
    document.onset = { from: "trigger", trigger_column: " sync " };
    document.emg = [{ muscle: "soleus", column: "emg", unit: "uV", reference: 0.001 }];
    document.axes = [
      {
        name: "DP",
        angle: channel("ang", "mrad"),
        limb_angle: channel("shank", "rad"),
        fit_angle: "limb",
        torque_from: {
          force_plate: {
            force: ["fx", "fy", "fz"],
            moment: ["mx", "my", "mz"],
            force_unit: "kN",
            moment_unit: "N.cm",
            joint_to_plate_m: [0, 0.02, 0.1],
            about: "y",
          },
        },
      },
    ];
    const protocol = parseProtocol(JSON.stringify(document));
    expect(protocol.time).toEqual({ rate_hz: 1000 });
    expect(protocol.onset.trigger_column).toBe("sync");
    expect(protocol.axes[0]?.torque).toBeUndefined();
    expect(protocol.axes[0]?.torque_from?.force_plate.about).toBe("y");
    expect(protocol.emg[0]?.reference).toBe(0.001);
  });

  it.each([
    // required
    ["version", undefined, "version", /missing/],
    ["version", 2, "version", /Version 2/],
    ["kind", undefined, "kind", /missing/],
    ["kind", "ramp", "kind", /not a kind/],
    ["time", undefined, "time", /missing/],
    ["axes", undefined, "axes", /missing/],
    ["axes", [], "axes", /At least one/],
    ["axes.0.name", undefined, "axes.0.name", /missing/],
    ["axes.0.name", " ", "axes.0.name", /empty/],
    ["axes.0.angle", undefined, "axes.0.angle", /missing/],
    ["axes.0.angle.column", undefined, "axes.0.angle.column", /missing/],
    ["axes.0.angle.column", "", "axes.0.angle.column", /empty/],
    ["axes.0.angle.unit", undefined, "axes.0.angle.unit", /missing/],
    ["axes.0.torque", undefined, "axes.0.torque", /torque_from/],
    ["axes.0.torque.unit", undefined, "axes.0.torque.unit", /missing/],
    // units: exactly spelt and of the right kind
    ["axes.0.angle.unit", "Deg", "axes.0.angle.unit", /use deg, rad or mrad/],
    ["axes.0.angle.unit", "N.m", "axes.0.angle.unit", /angle/],
    ["axes.0.torque.unit", "Nm", "axes.0.torque.unit", /use N.m, N.mm, N.cm or kN.m/],
    ["axes.0.torque.unit", "N", "axes.0.torque.unit", /torque/],
    ["axes.0.limb_angle", { column: "x", unit: "m" }, "axes.0.limb_angle.unit", /angle/],
    ["time.unit", "min", "time.unit", /use s, ms or us/],
    ["emg", [{ muscle: "m", column: "e", unit: "N" }], "emg.0.unit", /use V, mV or uV/],
    // time: one of two
    ["time", {}, "time", /rate_hz/],
    ["time", { rate_hz: 1000, column: "t", unit: "s" }, "time", /not both/],
    ["time", { rate_hz: 1000, unit: "s" }, "time", /not both/],
    ["time", { column: "t" }, "time.unit", /missing/],
    ["time", { unit: "s" }, "time.column", /missing/],
    ["time", { rate_hz: 0 }, "time.rate_hz", /over 0/],
    // channels
    ["axes.0.angle.gain", 0, "axes.0.angle.gain", /erase/],
    ["axes.0.angle.gain", "2", "axes.0.angle.gain", /"2" is not a number/],
    ["axes.0.torque.offset", null, "axes.0.torque.offset", /null is not a number/],
    ["axes.0.torque.sign", 0, "axes.0.torque.sign", /use 1 or -1/],
    ["axes.0.torque.sign", 2, "axes.0.torque.sign", /use 1 or -1/],
    ["axes.0.fit_angle", "limb", "axes.0.fit_angle", /limb_angle/],
    ["axes.0.fit_angle", "joint", "axes.0.fit_angle", /rig or limb/],
    ["axes.0.positive", "negative", "axes.0.negative", /different names/],
    ["emg", [{ muscle: "m", column: "e", unit: "V", reference: 0 }], "emg.0.reference", /over 0/],
    ["emg", [{ muscle: "m", column: "e", unit: "V", gain: 2 }], "emg.0.gain", /not a key/],
    // unknown keys and keys of other kinds
    ["filtre", {}, "filtre", /spelling/],
    ["axes.0.angle.units", "deg", "axes.0.angle.units", /spelling/],
    ["model.fixed.k", 1, "model.fixed.k", /spelling/],
    ["onset.threshold", 1, "onset.threshold", /spelling/],
    ["welch", { segment_s: 4 }, "welch", /"continuous"/],
    ["band_hz", [0.5, 10], "band_hz", /"continuous"/],
    ["axes.0.drive", { column: "d", unit: "deg" }, "axes.0.drive", /"continuous"/],
    ["directions_deg", 22.5, "directions_deg", /"sweep"/],
    ["speed_deg_s", 5, "speed_deg_s", /"sweep"/],
    ["bench", {}, "bench", /"bench"/],
    // ranges
    ["filter.order", 0, "filter.order", /least is 1/],
    ["filter.order", 9, "filter.order", /most is 8/],
    ["filter.order", 2.5, "filter.order", /whole number/],
    ["filter.cutoff_hz", 0, "filter.cutoff_hz", /over 0/],
    ["filter.family", "bessel", "filter.family", /use butterworth/],
    ["onset.cutoff_hz", -1, "onset.cutoff_hz", /over 0/],
    ["onset.min_separation_ms", -1, "onset.min_separation_ms", /least is 0/],
    ["reflex_limit_ms", -1, "reflex_limit_ms", /least is 0/],
    ["lag_ms", 100.5, "lag_ms", /most is 100/],
    ["lag_ms", -101, "lag_ms", /least is -100/],
    ["max_filled_samples", 1.5, "max_filled_samples", /whole/],
    ["max_filled_samples", -1, "max_filled_samples", /least is 0/],
    ["uncertainty.level", 0.4, "uncertainty.level", /least is 0.5/],
    ["uncertainty.level", 1, "uncertainty.level", /most is 0.999/],
    ["uncertainty.resamples", 99, "uncertainty.resamples", /least is 100/],
    ["uncertainty.resamples", 100_001, "uncertainty.resamples", /most is 100000/],
    ["uncertainty.seed", 0.5, "uncertainty.seed", /whole/],
    ["window_ms", [100, 0], "window_ms", /after the start/],
    ["window_ms", [0, 0], "window_ms", /after the start/],
    ["window_ms", [0, 10_001], "window_ms.1", /most is 10000/],
    ["window_ms", [0], "window_ms", /2 entries/],
    ["window_ms", [0, 1, 2], "window_ms", /At most 2/],
    ["baseline_ms", [-10_001, 0], "baseline_ms.0", /least is -10000/],
    ["baseline_ms", [0, -50], "baseline_ms", /after the start/],
    ["table.separator", "#", "table.separator", /auto/],
    ["table.decimal", ";", "table.decimal", /auto/],
    ["table.header_row", 0, "table.header_row", /least is 1/],
    ["table.header_row", "first", "table.header_row", /not/],
    // between fields
    ["onset.from", "trigger", "onset.trigger_column", /trigger/],
    ["onset.expected_amplitude_deg", 3, "onset.expected_duration_ms", /duration too/],
    ["onset.expected_duration_ms", 50, "onset.expected_amplitude_deg", /amplitude too/],
    ["background.target", 2, "background.tolerance", /tolerance/],
    ["model.terms", [], "model.terms", /free/],
    ["model.terms", ["K", "K"], "model.terms.1", /twice/],
    ["model.terms", ["K", "M"], "model.terms.1", /use K, B or I/],
    ["model.fixed", { K: 1, B: 1, I: 1 }, "model.terms", /free/],
    ["model", { terms: ["K"], fixed: { I: 1 } }, "model.fixed.I", /not among/],
    ["rig", { RUD: { K: 1, B: 0, I: 0 } }, "rig.RUD", /no axis/],
    ["rig", { FE: { K: "1" } }, "rig.FE.K", /not a number/],
    ["rig", { K: "1" }, "rig.K", /not a number/],
    ["rig", { K: 1, X: 2 }, "rig.X", /for all axes/],
    ["rig", { K: 1, FE: { K: 1 } }, "rig.K", /for all axes/],
    ["rig", { FE: { M: 1 } }, "rig.FE.M", /spelling/],
    ["rig", [1, 2, 3], "rig", /not an object/],
    // derivative
    ["derivative", "forward", "derivative", /./],
    ["derivative", { savitzky_golay: {} }, "derivative.savitzky_golay.polynomial", /missing/],
    [
      "derivative",
      { savitzky_golay: { polynomial: 1, span_ms: 21 } },
      "derivative.savitzky_golay.polynomial",
      /least is 2/,
    ],
    [
      "derivative",
      { savitzky_golay: { polynomial: 6, span_ms: 21 } },
      "derivative.savitzky_golay.polynomial",
      /most is 5/,
    ],
    [
      "derivative",
      { savitzky_golay: { polynomial: 3, span_ms: 0 } },
      "derivative.savitzky_golay.span_ms",
      /over 0/,
    ],
    [
      "derivative",
      { savitzky_golay: { polynomial: 3, span_ms: 1001 } },
      "derivative.savitzky_golay.span_ms",
      /most is 1000/,
    ],
    // robustness
    ["robustness", { window_end_ms: [], cutoff_hz: [20] }, "robustness.window_end_ms", /At least/],
    ["robustness", { window_end_ms: [40], cutoff_hz: [] }, "robustness.cutoff_hz", /cut-off/],
    ["robustness", { window_end_ms: [40], cutoff_hz: [0] }, "robustness.cutoff_hz.0", /over 0/],
    [
      "robustness",
      { window_end_ms: [40, 0], cutoff_hz: [20] },
      "robustness.window_end_ms.1",
      /after/,
    ],
  ])("with %s = %j is refused at %s", (path, value, field, words) => {
    const found = problem(changed(path, value));
    expect(found.field).toBe(field);
    expect(found.message).toMatch(words);
    expect(found.message).toMatch(/^["A-Z0-9−-].*\.$|^null .*\.$/);
  });

  it.each(["continuous", "sweep", "bench"])("of the kind %s is refused by its kind", (kind) => {
    expect(problem({ version: 1, kind, bench: {}, speed_deg_s: 5 })).toEqual({
      field: "kind",
      message: `Kind "${kind}" is not analysed by this version; it analyses "transient".`,
    });
  });

  it("with both torque and torque_from is refused", () => {
    const document = changed("axes.0.torque_from", {
      force_plate: {
        force: ["fx", "fy", "fz"],
        moment: ["mx", "my", "mz"],
        force_unit: "N",
        moment_unit: "N.m",
        joint_to_plate_m: [0, 0, 0.1],
        about: "x",
      },
    });
    expect(problem(document).field).toBe("axes.0.torque_from");
    const plate = "axes.0.torque_from.force_plate";
    const alone = () => changed("axes.0.torque", undefined, structuredClone(document));
    expect(() => parseProtocol(JSON.stringify(alone()))).not.toThrow();
    expect(problem(changed(`${plate}.force_unit`, "N.m", alone())).field).toBe(
      `${plate}.force_unit`,
    );
    expect(problem(changed(`${plate}.moment_unit`, "N", alone())).field).toBe(
      `${plate}.moment_unit`,
    );
    expect(problem(changed(`${plate}.about`, "w", alone())).field).toBe(`${plate}.about`);
    expect(problem(changed(`${plate}.force`, ["fx"], alone())).field).toBe(`${plate}.force`);
    expect(problem(changed(`${plate}.joint_to_plate_m`, undefined, alone())).field).toBe(
      `${plate}.joint_to_plate_m`,
    );
  });

  it("with two axes of one name is refused", () => {
    const document = minimal();
    const [first] = document.axes as Document[];
    document.axes = [first, first];
    expect(problem(document).field).toBe("axes.1.name");
  });

  it("with a robustness grid and no filter needs no cut-offs", () => {
    const document = changed("filter", null);
    document.robustness = { window_end_ms: [40, 60] };
    expect(parseProtocol(JSON.stringify(document)).robustness).toEqual({
      window_end_ms: [40, 60],
      cutoff_hz: [],
    });
  });

  it("with a key that hides in objects is refused by its dotted name", () => {
    const text = JSON.stringify(minimal());
    expect(problem(text.replace('"column":"ang"', '"__proto__":{},"column":"ang"')).field).toBe(
      "axes.0.angle.__proto__",
    );
    expect(problem(text.replace("{", '{"constructor":1,')).field).toBe("constructor");
    expect(problem(text.replace("{", '{"rig":{"__proto__":{"K":1}},')).field).toBe("rig.__proto__");
  });

  it("that is no JSON, or holds a key twice, is refused with its line", () => {
    expect(() => parseProtocol('{\n"version": 1,\n"version": 1}')).toThrow(
      expect.objectContaining({ name: "ProtocolError", field: null, line: 3 }),
    );
    expect(problem("[]").message).toMatch(/object/);
    expect(problem("null").message).toMatch(/object/);
  });

  it("has a JSON Schema", () => {
    const schema = z.toJSONSchema(protocolSchema, { io: "input" });
    expect(schema.required).toEqual(["version", "kind", "time", "axes"]);
    expect(schema.additionalProperties).toBe(false);
  });
});

const map: RecordingMap = {
  table: { separator: ";", decimal: ",", header_row: "auto" },
  time: { column: "t", unit: "s" },
  axes: [
    {
      name: "FE",
      angle: { column: "ang", unit: "deg", gain: 2, offset: 0.5, sign: -1 },
      torque: { column: "trq", unit: "N.m", gain: 1, offset: 0, sign: -1 },
    },
  ],
  trigger: "sync",
  emg: [{ muscle: "flexor", column: "e1", unit: "mV" }],
};
const axes = [
  { name: "RUD", positive: "radial", negative: "ulnar" },
  { name: "FE", positive: "extension", negative: "flexion" },
];

describe("compiling a protocol", () => {
  const input = { choices: defaultChoices, map, axes, geometry: {}, rig: null };

  it("joins choices, map, directions and rig into one text that reads back as the same protocol", () => {
    const compiled = compileProtocol({
      ...input,
      rig: { FE: { K: 0.1, B: 0.01, I: 0.002 }, RUD: { K: 9, B: 9, I: 9 } },
    });
    expect(parseProtocol(compiled.text)).toEqual(compiled.protocol);
    expect(compiled.text).not.toMatch(/\s"|: /);
    expect(compiled.text.startsWith('{"axes":[{"angle":{"column":"ang"')).toBe(true);
    expect(compiled.protocol.axes[0]).toMatchObject({ positive: "extension", negative: "flexion" });
    expect(compiled.protocol.rig).toEqual({ FE: { K: 0.1, B: 0.01, I: 0.002 } });
    expect(compiled.protocol.onset.trigger_column).toBeNull();
  });

  it("gives the same bytes whatever the order of keys", () => {
    const turned = Object.fromEntries(Object.entries(defaultChoices).reverse());
    const read = readProtocolChoices(turned);
    if (read.status !== "valid") throw new Error("refused");
    expect(compileProtocol({ ...input, choices: read.choices }).text).toBe(
      compileProtocol(input).text,
    );
  });

  it("takes the trigger's column from the map where onsets come from it", () => {
    const choices = {
      ...defaultChoices,
      onset: { ...defaultChoices.onset, from: "trigger" as const },
    };
    expect(compileProtocol({ ...input, choices }).protocol.onset.trigger_column).toBe("sync");
    expect(() => compileProtocol({ ...input, choices, map: { ...map, trigger: null } })).toThrow(
      expect.objectContaining({ field: "onset.trigger_column" }),
    );
  });

  it("refuses a map with an axis that the study does not have, or a unit that does not suit", () => {
    expect(() => compileProtocol({ ...input, axes: [] })).toThrow(
      expect.objectContaining({ field: "axes.0.name" }),
    );
    const [first] = map.axes;
    if (first === undefined) throw new Error("no axis");
    const wrong = { ...map, axes: [{ ...first, torque: { ...first.torque, unit: "V" as const } }] };
    expect(() => compileProtocol({ ...input, map: wrong })).toThrow(
      expect.objectContaining({ field: "axes.0.torque.unit" }),
    );
  });
});

describe("a study's choices", () => {
  it("give all problems of a form at once, each by its field", () => {
    const read = readProtocolChoices({
      ...defaultChoices,
      lag_ms: 300,
      filter: { family: "butterworth", order: 0, cutoff_hz: 20 },
      extra: 1,
    });
    if (read.status === "valid") throw new Error("accepted");
    expect(read.problems.map((each) => each.field).sort()).toEqual([
      "extra",
      "filter.order",
      "lag_ms",
    ]);
  });

  it("say in words what is done, with both of the filter's figures", () => {
    const words = Object.fromEntries(
      describeChoices(defaultChoices).map(({ label, value }) => [label, value]),
    );
    expect(words["Low-pass filter"]).toContain(
      "−3 dB at 20 Hz after one pass, at 16.05 Hz after both",
    );
    const atRate = describeChoices(defaultChoices, 200)[0]?.value;
    expect(atRate).toContain("at 16.23 Hz after both (at 200 samples a second)");
    expect(describeChoices(defaultChoices, 40)[0]?.value).toContain("cannot carry");
    expect(words.Baseline).toBe("−50 to 0 ms from onset");
    expect(words.Model).toBe("Torque from stiffness K, damping B, inertia I");
    expect(words.Interval).toContain("95 %");
  });

  it("say what is fixed, bounded, smoothed, filled and tried", () => {
    const read = readProtocolChoices({
      filter: null,
      derivative: { savitzky_golay: { polynomial: 3, span_ms: 21 } },
      model: { terms: ["K", "I"], fixed: { I: 0.0123456 }, nonnegative: true },
      background: { target: -2, tolerance: 0.5 },
      max_filled_samples: 3,
      lag_ms: -1.5,
      robustness: { window_end_ms: [40, 60] },
      onset: { expected_amplitude_deg: 3, expected_duration_ms: 50 },
    });
    if (read.status === "invalid") throw new Error(JSON.stringify(read.problems));
    const words = describeChoices(read.choices).map(({ label, value }) => `${label}: ${value}`);
    expect(words).toContain("Low-pass filter: None");
    expect(words).toContain(
      "Model: Torque from stiffness K, inertia I fixed at 0.01235 kg·m²; no free term below 0",
    );
    expect(words).toContain("Background torque: −2 ± 0.5 N·m");
    expect(words).toContain("Delay of the torque: −1.5 ms, corrected");
    expect(words).toContain("Expected movement: 3° in 50 ms");
    expect(words).toContain("Also tried: Window ends of 40, 60 ms");
  });

  // |H|² of a Butterworth low-pass after the bilinear transform: 1 / (1 + (tan(πf/fs)/tan(πfc/fs))^2n).
  it.each([
    [20, 2, 1000],
    [100, 4, 500],
    [10, 1, 200],
  ])(
    "the figure after both passes is where |H|⁴ is a half (%d Hz, order %d, at %d Hz)",
    (cutoff, order, rate) => {
      const f = bothPassesCutoffHz({ family: "butterworth", order, cutoff_hz: cutoff }, rate);
      const ratio = Math.tan((Math.PI * f) / rate) / Math.tan((Math.PI * cutoff) / rate);
      expect((1 + ratio ** (2 * order)) ** -2).toBeCloseTo(0.5, 12);
    },
  );
});
