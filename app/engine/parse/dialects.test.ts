import { readFileSync } from "node:fs";
import { describe, expect, it } from "vitest";
import { previewTable } from "#app/engine/parse/preview.ts";
import { readTable } from "#app/engine/parse/read-table.ts";
import type { TableProtocol } from "#app/engine/types.ts";
import expected from "../../../fixtures/reading-dialects/expected.json";

const AUTO: TableProtocol = { separator: "auto", decimal: "auto", header_row: "auto" };
const folder = new URL("../../../fixtures/reading-dialects/", import.meta.url);

// Written by Python's csv module and codecs, values read by its float(): equality is exact.
describe("files as other programs write them (Python 3.11 csv, codecs, float)", () => {
  it.each(Object.entries(expected))("%s is read as it was written", (file, truth) => {
    const bytes = new Uint8Array(readFileSync(new URL(file, folder)));
    const { encoding, separator, decimal, headerLine, unitsLine } = truth;
    const dialect = { encoding, separator, decimal, headerLine, unitsLine };
    expect(previewTable(bytes, AUTO).dialect).toEqual(dialect);
    const names = Object.keys(truth.columns);
    const table = readTable(bytes, AUTO, names);
    expect(table.dialect).toEqual(dialect);
    expect(table.rows).toBe(truth.rows);
    const found = [...table.columns].map(([name, values]) => [name, [...values]]);
    expect(Object.fromEntries(found)).toEqual(truth.columns);
    const flags = table.flags.map(({ code }) => code);
    expect(flags).toEqual(
      file === "cut-off.csv"
        ? ["truncated"]
        : encoding === "windows-1252"
          ? ["encoding_guessed"]
          : [],
    );
  });
});
