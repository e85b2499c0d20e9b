import { describe, expect, it } from "vitest";
import {
  conditionFills,
  type FigureCondition,
  type FigureParticipant,
  nameLines,
  participantGeometry,
} from "./participant-geometry.ts";

const CONDITIONS: FigureCondition[] = ["bare", "loose", "firm", "grip"].map((name) => ({
  id: name,
  name,
  isBaseline: name === "bare",
  isActive: name === "grip",
}));
const SIZE = { width: 448, height: 236 };

function participant(...values: (number | null)[]): FigureParticipant {
  return {
    code: "W01",
    values: values.map((value) => ({ value, provisional: false, label: "" })),
  };
}

function geometry(...people: FigureParticipant[]) {
  return participantGeometry(CONDITIONS, people, [], SIZE);
}

describe("a participant's line", () => {
  it("joins neighbours and breaks where passive ends and active begins", () => {
    const [line] = geometry(participant(2, 2.5, 4, 7)).participants;
    expect(line?.segments).toHaveLength(2);
    expect(line?.dots.map((dot) => dot.joined)).toEqual([true, true, true, false]);
  });

  it("breaks at a missing cell: what stands alone is a point beside the mean", () => {
    const { participants, places } = geometry(participant(2, null, 4, null));
    expect(participants[0]?.segments).toEqual([]);
    expect(participants[0]?.dots).toHaveLength(2);
    expect(participants[0]?.dots[0]?.x).toBe((places[0]?.x ?? 0) - 12);
  });

  it("is provisional between two values where one of them is", () => {
    const person = participant(2, 2.5, 4, null);
    person.values[1] = { value: 2.5, provisional: true, label: "" };
    const [line] = geometry(person).participants;
    expect(line?.segments.map((segment) => segment.provisional)).toEqual([true, true]);
  });
});

describe("the axis", () => {
  it("holds zero, every value and every bound", () => {
    const { y, ticks } = participantGeometry(
      CONDITIONS,
      [participant(4, 5, 6, null)],
      [{ mean: 5, interval: [3.2, 9.3], label: "" }],
      SIZE,
    );
    const [low = 0, high = 0] = y.domain();
    expect(low).toBe(0);
    expect(high).toBeGreaterThanOrEqual(9.3);
    expect(ticks).toContain(0);
    expect(ticks.length).toBeGreaterThanOrEqual(4);
    expect(ticks.length).toBeLessThanOrEqual(7);
  });

  it("goes below zero where a value does", () => {
    const { y } = geometry(participant(-1, 2, 3, 4));
    expect(y.domain()[0]).toBeLessThanOrEqual(-1);
  });

  it("stands even where there is no value at all", () => {
    const { y, ticks } = geometry(participant(null, null, null, null));
    expect(y.domain()).toEqual([0, 1]);
    expect(ticks).toContain(0);
  });
});

it("puts one rule where passive ends and active begins, between the two conditions", () => {
  const { breaks, places } = geometry();
  expect(breaks).toHaveLength(1);
  expect(breaks[0]?.left).toBe("passive");
  expect(breaks[0]?.x).toBe(((places[2]?.x ?? 0) + (places[3]?.x ?? 0)) / 2);
});

describe("fills of the means", () => {
  it("are hollow for the baseline and rise along the slate ramp to its darkest step", () => {
    expect(conditionFills(CONDITIONS)).toEqual([
      "var(--sheet)",
      "var(--step-2)",
      "var(--step-4)",
      "var(--step-5)",
    ]);
  });

  it("use the whole ramp, never past it, for many conditions", () => {
    const many = Array.from({ length: 9 }, (_, i) => ({
      id: String(i),
      name: String(i),
      isBaseline: false,
      isActive: false,
    }));
    const fills = conditionFills(many);
    expect(fills[0]).toBe("var(--step-1)");
    expect(fills[8]).toBe("var(--step-5)");
  });
});

describe("a condition's name below its place", () => {
  it("stands in one line where it fits, else breaks between words", () => {
    expect(nameLines("tight", 60)).toEqual(["tight"]);
    expect(nameLines("tight, grip", 60)).toEqual(["tight,", "grip"]);
  });

  it("is cut where it does not fit even so", () => {
    expect(nameLines("unreasonably", 40)).toEqual(["unrea…"]);
    expect(nameLines("wide and unreasonably", 60)).toEqual(["wide and", "unreason…"]);
  });
});
