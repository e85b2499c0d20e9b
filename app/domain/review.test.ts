import { describe, expect, it } from "vitest";
import { whyNotReviewer } from "./review.ts";

describe("who may decide on a fit", () => {
  const hands = { takenInBy: "anna", savedBy: ["ben", "carl"], editedBy: ["dora"] };

  it.each([
    ["anna", "You took this recording in, so another reviewer decides on it."],
    ["carl", "You saved a fit of this recording, so another reviewer decides on it."],
    [
      "dora",
      "You trimmed or set aside windows of this recording, so another reviewer decides on it.",
    ],
    ["emil", null],
  ])("%s: %s", (person, sentence) => {
    expect(whyNotReviewer(person, hands)).toBe(sentence);
  });
});
