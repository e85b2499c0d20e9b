import { describe, expect, it } from "vitest";
import { fileNamePatternProblem, identifyingHint, proposeFromFileName } from "./file-name.ts";

const known = {
  participants: ["W01", "W07", "W10", "W11"],
  conditions: ["No brace", "Brace slack", "Brace 20 kPa", "Brace 40 kPa", "Brace"],
  postures: ["Neutral", "Flexed 20"],
  axes: ["FE", "RUD"],
};
const nothing = { participant: null, condition: null, posture: null, axis: null, repeat: null };
const pattern = "{participant}_{condition}_{posture}_{repeat}";

describe("a proposal by the study's pattern", () => {
  it.each([
    ["W07_Brace 20 kPa_Neutral_2.csv", "Brace 20 kPa", "Neutral", 2],
    ["w7-brace_20kpa-neutral-rep02.CSV", "Brace 20 kPa", "Neutral", 2],
    ["W07 nobrace flexed20 3.txt", "No brace", "Flexed 20", 3],
    ["folder/W07_Brace_Neutral_r1.tsv", "Brace", "Neutral", 1],
  ])("reads %s", (fileName, condition, posture, repeat) => {
    expect(proposeFromFileName(fileName, pattern, known)).toEqual({
      ...nothing,
      participant: "W07",
      condition,
      posture,
      repeat,
    });
  });

  it("leaves open what is not one of the study's codes", () => {
    expect(proposeFromFileName("W99_Brace slack_Neutral_2.csv", pattern, known)).toEqual({
      ...nothing,
      condition: "Brace slack",
      posture: "Neutral",
      repeat: 2,
    });
  });

  it("reads codes that stand side by side, fixed words and pieces of no interest", () => {
    expect(
      proposeFromFileName("S2_W10FE_x_RUN3.csv", "S2_{participant}{axis}_{any}_{repeat}", known),
    ).toEqual({
      ...nothing,
      participant: "W10",
      axis: "FE",
      repeat: 3,
    });
  });

  it("searches where the name does not follow the pattern", () => {
    expect(proposeFromFileName("RUD W01 brace-slack.csv", pattern, known)).toEqual({
      ...nothing,
      participant: "W01",
      condition: "Brace slack",
      axis: "RUD",
    });
  });
});

describe("a proposal without a pattern", () => {
  it.each([
    [
      "W11 fe no-brace neutral 04.csv",
      { participant: "W11", axis: "FE", condition: "No brace", posture: "Neutral", repeat: 4 },
    ],
    ["2026-11-30_W01_trial12.csv", { participant: "W01", repeat: 12 }],
    ["brace40kPa.w10.csv", { participant: "W10", condition: "Brace 40 kPa" }],
    ["W1.5_brace.csv", { condition: "Brace" }],
    ["W1_05.csv", { participant: "W01", repeat: 5 }],
    ["W07_W11_brace.csv", { condition: "Brace" }],
    ["embrace.csv", {}],
    ["", {}],
  ])("reads %j", (fileName, found) => {
    expect(proposeFromFileName(fileName, null, known)).toEqual({ ...nothing, ...found });
  });

  it("does not take a half for five, nor choose between codes that differ in spelling alone", () => {
    const levels = { ...known, conditions: ["5 kPa", "0.5 kPa"], participants: ["P1", "P01"] };
    expect(proposeFromFileName("P1_0.5kPa.csv", null, levels)).toEqual({
      ...nothing,
      condition: "0.5 kPa",
    });
    expect(proposeFromFileName("P1_05kPa.csv", null, levels).condition).toBe("5 kPa");
  });
});

describe("a pattern", () => {
  it.each([
    [pattern, null],
    ["{participant}-{any}-{any}", null],
    ["{subject}_{condition}", /\{subject\} is not known/],
    ["{participant}_{participant}", /stands twice/],
    ["{participant", /no partner/],
    ["W_{any}", /names nothing/],
  ])("%s", (text, words) => {
    const problem = fileNamePatternProblem(text);
    if (words === null) expect(problem).toBeNull();
    else expect(problem).toMatch(words);
  });
});

describe("a hint at a person", () => {
  it.each([
    ["1987-05-12_W07.csv", "1987-05-12"],
    ["W07_12.05.1987.csv", "12.05.1987"],
    ["W07 19870512.csv", "19870512"],
    ["Anna_Schmidt_brace.csv", "Anna_Schmidt"],
    ["Schmidt, Anna.csv", "Schmidt, Anna"],
    ["trial AnnaSchmidt 1.csv", "AnnaSchmidt"],
    ["Zoë-Müller.csv", "Zoë-Müller"],
  ])("is given for %s", (fileName, what) => {
    expect(identifyingHint(fileName)).toContain(`“${what}”`);
    expect(identifyingHint(fileName)).toMatch(/\.$/);
  });

  it.each([
    "W07_Brace_Slack_2.csv",
    "2026-11-30_W07.csv",
    "W07 20261130.csv",
    "W07_1987.csv",
    "W07_45.99.1987.csv",
    "Wrist Extension 1.csv",
    "W07_FE_noBrace.csv",
    "",
  ])("is not given for %j", (fileName) => {
    expect(identifyingHint(fileName, ["Brace slack"])).toBeNull();
  });

  it("is not given for words of the study", () => {
    expect(identifyingHint("Carbon_Shell.csv")).not.toBeNull();
    expect(identifyingHint("Carbon_Shell.csv", ["carbon shell"])).toBeNull();
  });
});
