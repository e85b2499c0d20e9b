import { describe, expect, it } from "vitest";
import { percent, reasonInWords, standingInWords } from "./standing-words.ts";

describe("a file's standing in words", () => {
  it("names what is wanted, the first two by name", () => {
    expect(standingInWords({ kind: "needs_you", wants: ["participant"] })).toBe(
      "needs you: participant",
    );
    expect(standingInWords({ kind: "needs_you", wants: ["a", "b", "c", "d"] })).toBe(
      "needs you: a; b; and 2 more",
    );
  });

  it("says 100 % only of what has arrived whole", () => {
    expect(standingInWords({ kind: "sending", share: 0.9999 })).toBe("uploading 99 %");
    expect(percent(1)).toBe("100 %");
  });

  it("says where a broken upload stands and why", () => {
    expect(standingInWords({ kind: "broken", share: 0.42, sentence: "No connection." })).toBe(
      "stopped at 42 %: No connection.",
    );
  });
});

describe("the reason beside the button", () => {
  const needs = (name: string) => ({
    name,
    standing: { kind: "needs_you" as const, wants: ["condition"] },
  });

  it("names the one file that needs a person, or counts them and names the first", () => {
    const none = { good: 0, reading: 0, underWay: 0 };
    expect(reasonInWords({ ...none, waiting: [needs("a.csv")] })).toBe(
      "a.csv needs you: condition.",
    );
    expect(reasonInWords({ ...none, waiting: [needs("a.csv"), needs("b.csv")], reading: 1 })).toBe(
      "2 files need you, first a.csv: condition. 1 file is being read.",
    );
  });

  it("says that nothing is left, and says nothing where all can go", () => {
    const none = { waiting: [], good: 0, reading: 0, underWay: 0 };
    expect(reasonInWords(none)).toBe("Nothing on the list is left to take in.");
    expect(reasonInWords({ ...none, good: 3 })).toBe("");
    expect(reasonInWords({ ...none, underWay: 1 })).toBe("");
  });
});
