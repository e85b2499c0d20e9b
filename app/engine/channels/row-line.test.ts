import { describe, expect, it } from "vitest";
import { lineOfRow } from "#app/engine/channels/row-line.ts";

describe("lineOfRow", () => {
  it("counts on from the first row where no line is skipped", () => {
    expect(lineOfRow({ firstDataLine: 3, skippedLines: [] }, 0)).toBe(3);
    expect(lineOfRow({ firstDataLine: 3, skippedLines: [] }, 7)).toBe(10);
  });

  it("passes the lines by that hold no row", () => {
    const table = { firstDataLine: 3, skippedLines: [4, 6, 7, 11] };
    expect([0, 1, 2, 3, 4, 5].map((row) => lineOfRow(table, row))).toEqual([3, 5, 8, 9, 10, 12]);
  });
});
