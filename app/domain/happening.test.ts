import { expect, it } from "vitest";
import { gatherHappenings, type Happening } from "./happening.ts";

function happening(sequence: number, change: Partial<Happening> = {}): Happening {
  return {
    sequence,
    at: sequence,
    kind: "recording.taken_in",
    personName: "Ana",
    study: { id: "s1", name: "Wraps" },
    about: `W0${sequence}, bare`,
    href: `/recordings/r${sequence}`,
    ...change,
  };
}

it("makes one line of neighbours alike, which leads to the study", () => {
  const [line, ...rest] = gatherHappenings([happening(3), happening(2), happening(1)], 5);
  expect(rest).toEqual([]);
  expect(line).toMatchObject({
    sentence: "took in 3 recordings of",
    at: 3,
    about: null,
    href: "/studies/s1",
  });
});

it("keeps apart what another person or another study stands between", () => {
  const lines = gatherHappenings(
    [happening(3), happening(2, { personName: "Bo" }), happening(1)],
    5,
  );
  expect(lines.map((line) => line.personName)).toEqual(["Ana", "Bo", "Ana"]);
  expect(lines[0]).toMatchObject({ about: "W03, bare", href: "/recordings/r3" });
});

it("gives no more lines than asked for", () => {
  const many = [3, 2, 1].map((n) => happening(n, { personName: String(n) }));
  expect(gatherHappenings(many, 2)).toHaveLength(2);
});
