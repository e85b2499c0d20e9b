import { describe, expect, it } from "vitest";
import { defaultChoices, protocolChoicesSchema } from "./protocol.ts";
import { fieldsOfChoices, readDecimal, readProtocolFields } from "./protocol-form.ts";

const BUSY = protocolChoicesSchema.parse({
  filter: { order: 3, cutoff_hz: 50 },
  derivative: { savitzky_golay: { polynomial: 3, span_ms: 21 } },
  onset: { from: "trigger", expected_amplitude_deg: 4, expected_duration_ms: 40 },
  reflex_limit_ms: 35,
  background: { target: 0.3, tolerance: 0.1 },
  baseline_ms: [-60, -10],
  window_ms: [0, 34.5],
  model: { terms: ["K", "B", "I"], fixed: { I: 0.003 }, nonnegative: true },
  lag_ms: -1.5,
  robustness: { window_end_ms: [30, 34.5], cutoff_hz: [20, 50] },
});

describe("choices as fields of a form", () => {
  it.each([
    ["the defaults", defaultChoices],
    ["every choice made", BUSY],
    ["no filter", protocolChoicesSchema.parse({ filter: null })],
  ])("come back as they were: %s", (_, choices) => {
    const read = readProtocolFields(fieldsOfChoices(choices), choices);
    expect(read).toEqual({ status: "valid", choices });
  });

  it("are read with a decimal comma", () => {
    const fields = { ...fieldsOfChoices(BUSY), "window_ms.1": "33,5" };
    const read = readProtocolFields(fields, BUSY);
    expect(read.status === "valid" && read.choices.window_ms).toEqual([0, 33.5]);
  });

  it("name the field that is not a number, and the one that is missing", () => {
    const fields = { ...fieldsOfChoices(BUSY), reflex_limit_ms: "soon", "window_ms.0": " " };
    const read = readProtocolFields(fields, BUSY);
    expect(read.status === "invalid" && read.problems.map((problem) => problem.field)).toEqual([
      "reflex_limit_ms",
      "window_ms.0",
    ]);
  });

  it("are held to the protocol's own rules, problem by field", () => {
    const fields = { ...fieldsOfChoices(BUSY), "onset.expected_duration_ms": "" };
    const read = readProtocolFields(fields, BUSY);
    expect(read).toMatchObject({
      status: "invalid",
      problems: [{ field: "onset.expected_duration_ms" }],
    });
  });

  it("refuse a list in which a comma may part two numbers or stand for a point", () => {
    const fields = { ...fieldsOfChoices(BUSY), "robustness.cutoff_hz": "30,40" };
    const read = readProtocolFields(fields, BUSY);
    expect(read.status === "invalid" && read.problems[0]?.field).toBe("robustness.cutoff_hz");
  });

  it("say that a model without a term fits nothing", () => {
    const fields: Record<string, string> = { ...fieldsOfChoices(defaultChoices) };
    for (const term of ["K", "B", "I"]) fields[`model.terms.${term}`] = "";
    const read = readProtocolFields(fields, defaultChoices);
    expect(read.status === "invalid" && read.problems[0]?.field).toBe("model.terms");
  });
});

it("reads decimals as people type them", () => {
  expect(readDecimal("0,5")).toBe(0.5);
  expect(readDecimal(" −3 ")).toBe(-3);
  expect(readDecimal("1e-3")).toBe(0.001);
  expect(readDecimal("1.2.3")).toBeNull();
  expect(readDecimal("0x10")).toBeNull();
  expect(readDecimal("")).toBeNull();
});
