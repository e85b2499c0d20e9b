import { describe, expect, it } from "vitest";
import type { ParticipantValue } from "./study-values.server.ts";
import { valueTable, type WantedValues } from "./value-table.server.ts";

const PARTICIPANTS = [
  { id: "p1", code: "W01" },
  { id: "p2", code: "W02" },
  { id: "p3", code: "W03" },
];
const CONDITIONS = [
  { id: "bare", name: "bare", isBaseline: true },
  { id: "tight", name: "tight", isBaseline: false },
];
const WANTED: WantedValues = {
  axis: "FE",
  direction: "extension",
  term: "K",
  postureId: "seated",
  approvedOnly: false,
};

function value(
  participant: string,
  condition: string,
  mean: number | null,
  change: Partial<ParticipantValue> = {},
): ParticipantValue {
  const none = { mean: null, sd: null, t: null, windows: 0 };
  return {
    participantId: participant,
    participantCode: participant,
    conditionId: condition,
    conditionName: condition,
    postureId: "seated",
    postureName: "seated",
    visitId: "v",
    day: "2026-10-05",
    axis: "FE",
    direction: "extension",
    K: { mean, sd: 0.1, t: mean === null ? null : [mean - 0.1, mean + 0.1], windows: 5 },
    B: none,
    I: none,
    windows: 5,
    level: 0.95,
    fits: [],
    state: "approved",
    isVerified: true,
    protocolNumbers: [1],
    ...change,
  };
}

function table(values: ParticipantValue[], wanted: Partial<WantedValues> = {}) {
  return valueTable(values, PARTICIPANTS, CONDITIONS, { ...WANTED, ...wanted });
}

describe("a table of participants' values", () => {
  it("takes means over participants, and changes over those with both conditions", () => {
    const { means, changes } = table([
      value("p1", "bare", 2),
      value("p2", "bare", 4),
      value("p1", "tight", 5),
      value("p2", "tight", 6),
      value("p3", "tight", 100),
    ]);
    expect(means.map((mean) => [mean.n, mean.mean])).toEqual([
      [2, 3],
      [3, 37],
    ]);
    expect(changes[0]).toBeNull();
    expect(changes[1]).toMatchObject({ n: 2, mean: 2.5 });
  });

  it("says who is left out: a participant with nothing once, a single cell by its condition", () => {
    const { leftOut, rows } = table([
      value("p1", "bare", 2),
      value("p2", "bare", 3),
      value("p2", "tight", 4),
    ]);
    expect(leftOut).toEqual(["No fit yet: W01 tight; W03."]);
    expect(rows[2]?.cells).toEqual([null, null]);
  });

  it("leaves unapproved values out only where that is asked for, and counts them otherwise", () => {
    const values = [value("p1", "bare", 2, { state: "draft" }), value("p2", "bare", 3)];
    expect(table(values)).toMatchObject({ shown: 2, unapproved: 1 });
    const approved = table(values, { approvedOnly: true });
    expect(approved).toMatchObject({ shown: 1, unapproved: 0 });
    expect(approved.leftOut).toContain("Not approved: W01 bare (draft).");
  });

  it("keeps visits apart: the last one stands, the others are named", () => {
    const { rows, leftOut } = table([
      value("p1", "bare", 9, { day: "2026-10-20", visitId: "later" }),
      value("p1", "bare", 2),
    ]);
    expect(rows[0]?.cells[0]?.mean).toBe(9);
    expect(leftOut).toContain("Earlier visits: W01 bare of 2026-10-05.");
  });

  it("has no value where the term was not fitted, and says so", () => {
    const { rows, leftOut } = table([value("p1", "bare", null)]);
    expect(rows[0]?.cells[0]).toBeNull();
    expect(leftOut).toContain("No window with K: W01 bare.");
  });

  it("never mixes another axis, direction or posture into it", () => {
    const { shown } = table([
      value("p1", "bare", 2, { axis: "RUD" }),
      value("p1", "bare", 2, { direction: "flexion" }),
      value("p1", "bare", 2, { postureId: "standing" }),
    ]);
    expect(shown).toBe(0);
  });

  it("names every protocol version that the values rest on", () => {
    const { protocolNumbers } = table([
      value("p1", "bare", 2, { protocolNumbers: [2] }),
      value("p2", "bare", 2, { protocolNumbers: [1, 2] }),
    ]);
    expect(protocolNumbers).toEqual([1, 2]);
  });
});
