import { describe, expect, it } from "vitest";
import { axisFlags, formatMs, formatVaf, reasonInWords, spanInWords, todoOf } from "./words.ts";

describe("words beside numbers", () => {
  it("writes milliseconds without zeros that say nothing", () => {
    expect([60, -2.5, 100.25, 0].map(formatMs)).toEqual(["60", "−2.5", "100.25", "0"]);
    expect(spanInWords([-5, 60])).toBe("−5–60 ms");
  });

  it("never rounds a VAF up to 100", () => {
    expect([99.96, 99.9, 87.24, null].map(formatVaf)).toEqual(["99.96", "99.9", "87.2", "–"]);
    expect([99.9961, 100, -198.52].map(formatVaf)).toEqual(["99.996", "100.0", "−198.5"]);
  });

  it("says for which direction a flag holds, where it does not hold for all", () => {
    const flag = { code: "low_vaf", text: "It fits badly." };
    const both = axisFlags([
      { direction: "extension", flags: [flag] },
      { direction: "flexion", flags: [flag] },
    ]);
    expect(both).toEqual([flag]);
    const one = axisFlags([
      { direction: "extension", flags: [flag] },
      { direction: "flexion", flags: [] },
    ]);
    expect(one[0]?.text).toBe("Towards extension: It fits badly.");
  });

  it("says what to do about a flag, and nothing about one it does not know", () => {
    expect(todoOf({ code: "low_vaf", text: "" })).toContain("residual");
    expect(todoOf({ code: "toString", text: "" })).toBeNull();
  });

  it("puts the engine's reason in words and leaves a person's as it is", () => {
    expect(reasonInWords("overlap").text).toContain("next perturbation");
    expect(reasonInWords("She laughed").text).toBe("She laughed.");
  });
});
