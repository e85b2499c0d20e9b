import { describe, expect, it } from "vitest";
import {
  compareResults,
  differenceSentence,
  isSameWindow,
  resultSchema,
  savedWindowSchema,
  windowsDocumentOf,
} from "./fit.ts";

const window = {
  axis: "FE",
  onset_s: 1.25,
  window_ms: [0, 100] as [number, number],
  included: true,
  reason: null,
};

describe("two results of one file", () => {
  it("agree where numbers are within 1e-12 of each other", () => {
    const saved = { pooled: [{ K: 1, t: [-2, 3e-9], flags: [] }], engine: "a" };
    const computed = { pooled: [{ K: 1 + 9e-13, t: [-2, 3e-9], flags: [] }], engine: "a" };
    expect(compareResults(saved, computed)).toBeNull();
  });

  it.each([
    [{ windows: [{ K: 1 }, { K: 2 }] }, { windows: [{ K: 1 }, { K: 2.000001 }] }, "windows[1].K"],
    [{ a: 1e-20 }, { a: 2e-20 }, "a"],
    [{ a: 0 }, { a: 1e-300 }, "a"],
    [{ a: null }, { a: 0 }, "a"],
    [{ a: [1, 2] }, { a: [1] }, "a.length"],
    [{ a: "x" }, { a: "y" }, "a"],
    [{ a: true }, { a: false }, "a"],
    [{ a: 1 }, { a: 1, b: 2 }, "b"],
    [{ a: 1, b: undefined }, { a: 1, b: 2 }, "b"],
    [{ a: [] }, { a: {} }, "a"],
  ])("differ, and the first place is named: %j, %j", (saved, computed, path) => {
    expect(compareResults(saved, computed)?.path).toBe(path);
    expect(compareResults(computed, saved)?.path).toBe(path);
  });

  it("do not tell 0 from −0, which JSON does not know", () => {
    expect(compareResults({ a: 0 }, { a: -0 })).toBeNull();
  });

  it("are apart in a sentence", () => {
    const difference = compareResults({ windows: [{ K: 1 }] }, { windows: [{ K: 1.5 }] });
    expect(difference && differenceSentence(difference)).toBe(
      "windows[0].K was saved as 1; the server computed 1.5, 3.3e-1 of it apart.",
    );
    const missing = compareResults({}, { late: null });
    expect(missing && differenceSentence(missing)).toBe(
      "late was saved as nothing; the server computed null.",
    );
  });
});

describe("a window to be saved", () => {
  const saved = { ...window, origin: "found", edited: false };

  it("is taken as it is", () => {
    expect(savedWindowSchema.parse(saved)).toEqual(saved);
  });

  it.each([
    [{ window_ms: [50, 50] }, "A window ends after it begins."],
    [{ included: false }, "A window that is set aside needs a reason."],
  ])("is refused with a sentence: %j", (change, sentence) => {
    const read = savedWindowSchema.safeParse({ ...saved, ...change });
    expect(read.error?.issues[0]?.message).toBe(sentence);
  });

  it("stands in WINDOWS without what only Ogee knows", () => {
    const sha256 = "a".repeat(64);
    const withOrigin = { ...window, origin: "by_hand", edited: true };
    expect(windowsDocumentOf(sha256, [withOrigin])).toEqual({
      version: 1,
      windows: [{ recording_sha256: sha256, ...window }],
    });
  });

  it("is the same only with the same trim and decision", () => {
    expect(isSameWindow(window, { ...window })).toBe(true);
    for (const change of [
      { axis: "RUD" },
      { onset_s: 1.251 },
      { window_ms: [0, 101] as [number, number] },
      { included: false },
      { reason: "slip" },
    ]) {
      expect(isSameWindow(window, { ...window, ...change })).toBe(false);
    }
  });
});

describe("a result that comes from a browser", () => {
  const result = {
    result_version: 1,
    engine: "ogee-engine 1.0.0",
    protocol_sha256: "",
    recordings: [],
    rig: {},
    windows: [],
    pooled: [],
  };

  it("keeps keys that an engine adds, for the second look to compare", () => {
    expect(resultSchema.parse({ ...result, added: 1 })).toEqual({ ...result, added: 1 });
  });

  it("is refused without its shape", () => {
    expect(resultSchema.safeParse({ ...result, windows: [{ K: "2" }] }).success).toBe(false);
    expect(resultSchema.safeParse({ ...result, result_version: 2 }).success).toBe(false);
  });
});
