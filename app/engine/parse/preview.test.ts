import { describe, expect, it } from "vitest";
import { previewTable } from "#app/engine/parse/preview.ts";
import type { TableProtocol } from "#app/engine/types.ts";

const AUTO: TableProtocol = { separator: "auto", decimal: "auto", header_row: "auto" };

function preview(text: string, table: Partial<TableProtocol> = {}) {
  return previewTable(new TextEncoder().encode(text), { ...AUTO, ...table });
}

/** 30 rows of time, angle and torque with the given separator and decimal mark. */
function rows(separator: string, decimal: string, end = "\n", quote = ""): string {
  return Array.from({ length: 30 }, (_, i) =>
    [i / 1000, 0.5 - i / 8, 12.25 + i]
      .map((value) => `${quote}${String(value).replace(".", decimal)}${quote}`)
      .join(separator),
  ).join(end);
}

function tableOf(text: string, table: Partial<TableProtocol> = {}) {
  const { dialect, header } = preview(text, table);
  const { separator, decimal, headerLine, unitsLine } = dialect;
  return { separator, decimal, headerLine, unitsLine, header };
}

const NAMES = ["t", "ang", "trq"];

describe("previewTable", () => {
  it.each([",", ";", "\t", "|", " "] as const)("proposes the separator %j", (separator) => {
    expect(tableOf(`${NAMES.join(separator)}\n${rows(separator, ".")}\n`)).toEqual({
      separator,
      decimal: ".",
      headerLine: 1,
      unitsLine: null,
      header: NAMES,
    });
  });

  it.each([";", "\t", "|", " "] as const)("proposes a decimal comma with %j", (separator) => {
    expect(tableOf(`${NAMES.join(separator)}\n${rows(separator, ",")}\n`)).toMatchObject({
      separator,
      decimal: ",",
      header: NAMES,
    });
  });

  it("understands a decimal comma in quoted cells between commas", () => {
    expect(tableOf(`t,ang,trq\n${rows(",", ",", "\n", '"')}\n`)).toMatchObject({
      separator: ",",
      decimal: ",",
      header: NAMES,
    });
  });

  it("tells two columns with a decimal comma from four between commas", () => {
    const text = `t\tang\n${Array.from({ length: 30 }, (_, i) => `0,${100 + i}\t1,5`).join("\n")}`;
    expect(tableOf(text)).toMatchObject({ separator: "\t", decimal: ",", header: ["t", "ang"] });
  });

  it("prefers the reading of numbers where commas stand in the names too", () => {
    const text = `Time, s;Angle, deg\n${Array.from({ length: 30 }, (_, i) => `${i};1,5`).join("\n")}`;
    expect(tableOf(text)).toMatchObject({
      separator: ";",
      decimal: ",",
      header: ["Time, s", "Angle, deg"],
    });
  });

  it("counts aligned spaces as one separator, and keeps single ones where cells may be empty", () => {
    const aligned = Array.from({ length: 30 }, (_, i) => `  ${i}    ${i / 2}  -1.5 `).join("\n");
    expect(tableOf(`  t   ang   trq\n${aligned}`)).toMatchObject({ separator: " ", header: NAMES });
    const sparse = Array.from({ length: 30 }, (_, i) => `${i}  -1.5`).join("\n");
    expect(preview(`t ang trq\n${sparse}`).rows[0]).toEqual(["0", "", "-1.5"]);
  });

  it("passes a preamble by, with separators in it or padded to the table's width", () => {
    const preamble = [
      "Lab recording 7",
      "Subject;S01;left",
      "Date;2026-11-03;",
      ";;",
      "Note: a;b",
      "",
    ];
    const found = preview(`${preamble.join("\n")}\nt;ang;trq\n${rows(";", ",")}\n`);
    expect(found.dialect).toMatchObject({ separator: ";", decimal: ",", headerLine: 7 });
    expect(found.header).toEqual(NAMES);
    expect(found.preamble).toEqual(preamble);
  });

  it("passes a small table above the recorded one by", () => {
    expect(tableOf(`mass,age,height\n70,31,1.8\n\nt,ang,trq\n${rows(",", ".")}`)).toMatchObject({
      headerLine: 4,
      header: NAMES,
    });
  });

  it("takes the first names where a table repeats them further down", () => {
    const text = `t,ang,trq\n${rows(",", ".")}\nt,ang,trq\n${rows(",", ".")}\n`;
    expect(tableOf(text)).toMatchObject({ headerLine: 1 });
  });

  it("reads on behind a quote in the preamble that is never closed", () => {
    expect(tableOf(`"rest, left side\nt,ang,trq\n${rows(",", ".")}`)).toMatchObject({
      headerLine: 2,
      header: NAMES,
    });
  });

  it.each([
    ["ms,deg,N.m", ["ms", "deg", "N.m"]],
    ["[ms],[deg],[N.m]", ["ms", "deg", "N.m"]],
    ["(s),(°),(Nm)", ["s", "°", "Nm"]],
    ["ms,,N·m", ["ms", "", "N·m"]],
    ["ms,1,-", ["ms", "1", "-"]],
  ])("finds the units row %s", (line, units) => {
    const found = preview(`t,ang,trq\n${line}\n${rows(",", ".")}`);
    expect(found.dialect).toMatchObject({ headerLine: 1, unitsLine: 2 });
    expect(found.units).toEqual(units);
    expect(found.rows[0]).toEqual(["0", "0.5", "12.25"]);
  });

  it("reads units in brackets behind a name, and takes other brackets for what they are", () => {
    const found = preview(`Time (ms),Angle [deg],Torque (left)\n${rows(",", ".")}`);
    expect(found.header).toEqual(["Time (ms)", "Angle [deg]", "Torque (left)"]);
    expect(found.units).toEqual(["ms", "deg", ""]);
  });

  it("reads quoted names with separators, doubled quotes and line ends in them", () => {
    const text = `"t","ang, ""left""","trq\n(N.m)"\n${rows(",", ".")}`;
    const found = preview(text);
    expect(found.header).toEqual(["t", 'ang, "left"', "trq\n(N.m)"]);
    expect(found.units).toEqual(["", "", "N.m"]);
    expect(found.rows[0]).toEqual(["0", "0.5", "12.25"]);
  });

  it("reads quotes behind a separator and blanks", () => {
    expect(tableOf(`"t", "ang, left", "trq"\n${rows(", ", ".")}`).header).toEqual([
      "t",
      "ang, left",
      "trq",
    ]);
  });

  it.each(["\r\n", "\r"])("counts lines that end with %j", (end) => {
    const text = ["remark", "", "t,ang,trq", "ms,deg,N.m", rows(",", ".", end)].join(end);
    expect(preview(text).dialect).toMatchObject({ headerLine: 3, unitsLine: 4 });
    expect(preview(text).preamble).toEqual(["remark", ""]);
  });

  it("allows one trailing separator in the names, in the rows or in both", () => {
    const body = rows(",", ".");
    const trailing = body.replaceAll("\n", ",\n");
    for (const text of [
      `t,ang,trq,\n${body}`,
      `t,ang,trq\n${trailing},`,
      `t,ang,trq,\n${trailing},`,
    ]) {
      expect(tableOf(text).header).toEqual(NAMES);
    }
  });

  it("allows blank lines anywhere", () => {
    const text = `\n\nt,ang,trq\n\nms,deg,N.m\n\n${rows(",", ".", "\n\n")}\n\n`;
    expect(preview(text).dialect).toMatchObject({ headerLine: 3, unitsLine: 5 });
  });

  it("lets columns hold text, repeat names or start with missing cells", () => {
    const body = Array.from({ length: 30 }, (_, i) => `rest;left;${i},5;NaN;${i}`).join("\n");
    expect(tableOf(`state;side;t;ang;side\n${body}`)).toMatchObject({
      separator: ";",
      decimal: ",",
      header: ["state", "side", "t", "ang", "side"],
    });
  });

  it("keeps columns without a name beside named ones, and prefers a line that names all", () => {
    const rows = Array.from({ length: 30 }, (_, i) => `${i},0.5,-1.25`).join("\n");
    expect(tableOf(`,ang,trq\n${rows}`).header).toEqual(["", "ang", "trq"]);
    expect(tableOf(`a,,\nt,ang,trq\n${rows}`).header).toEqual(NAMES);
  });

  it("takes whole numbers among the names for names", () => {
    expect(tableOf(`t,ang,1\n${rows(",", ".")}`)).toMatchObject({ header: ["t", "ang", "1"] });
  });

  it("finds the names above a first row that holds a bad cell", () => {
    const text = `t,ang,trq\nerr,err,1\n${rows(",", ".")}`;
    expect(tableOf(text)).toMatchObject({ headerLine: 1, header: NAMES });
  });

  it("takes the header row that is stated, whatever stands above it", () => {
    const text = `a,b,c\n1,2,3\n4,5,6\nt,ang,trq\nms,deg,N.m\n${rows(",", ".")}`;
    expect(tableOf(text)).toMatchObject({ headerLine: 4 });
    expect(tableOf(text, { header_row: 4 })).toMatchObject({ headerLine: 4, unitsLine: 5 });
    expect(tableOf(text, { header_row: 1 })).toMatchObject({
      headerLine: 1,
      header: ["a", "b", "c"],
    });
  });

  it("takes the separator and the decimal mark that are stated", () => {
    const text = `t;ang;trq\n${rows(";", ".").replaceAll(/\.\d+/g, "")}\n`;
    expect(tableOf(text, { decimal: "," })).toMatchObject({ decimal: "," });
    expect(() => preview(text, { separator: "," })).toThrow(/column names/);
  });

  it("shows the first twenty rows, each as long as the header", () => {
    const found = preview(`t,ang,trq\n${rows(",", ".")}`);
    expect(found.rows).toHaveLength(20);
    expect(found.rows.every((row) => row.length === 3)).toBe(true);
  });

  it("sees the decimal mark also far below rows of whole numbers", () => {
    const flat = "0;0;0\n".repeat(12000);
    expect(tableOf(`t;ang;trq\n${flat}1;0,5;2\n`)).toMatchObject({ decimal: "," });
  });

  it("leaves the half line at the end of a part of a file out", () => {
    const long = `t,ang,trq\n${`${rows(",", ".")}\n`.repeat(800)}`;
    expect(long.length).toBeGreaterThan(262144);
    expect(tableOf(long.slice(0, 262144))).toMatchObject({ header: NAMES });
  });

  it("refuses a file of numbers alone and says what is missing", () => {
    expect(() => preview(rows(",", "."))).toThrow(
      expect.objectContaining({
        name: "unreadable",
        message: expect.stringMatching(/column names/),
      }),
    );
  });

  it("refuses text that is no table", () => {
    expect(() => preview("Dear all,\nplease find attached\nthe report.\n")).toThrow(/column names/);
  });

  it("names the line where no row has as many cells as there are names", () => {
    const text = `t,ang,trq\n${rows(",", ".").replaceAll(/$/gm, ",1")}`;
    expect(() => preview(text)).toThrow(
      expect.objectContaining({
        line: 2,
        message: 'Line 2 has 4 cells, but the names in line 1 are 3: "t", "ang", "trq".',
      }),
    );
  });

  it("refuses a stated header row that is not there or holds no names", () => {
    const text = `t,ang,trq\n${rows(",", ".")}`;
    expect(() => preview(text, { header_row: 99 })).toThrow(/only 31 lines/);
    expect(() => preview(`\n${text}`, { header_row: 1 })).toThrow(/no column names/);
    expect(() => preview(text, { header_row: 2 })).toThrow(
      expect.objectContaining({ line: 2, message: expect.stringMatching(/no column names/) }),
    );
  });

  it("carries the flag of a guessed encoding", () => {
    const bytes = Uint8Array.from(`t,W°,trq\n${rows(",", ".")}`, (letter) => letter.charCodeAt(0));
    const found = previewTable(bytes, AUTO);
    expect(found.header[1]).toBe("W°");
    expect(found.flags.map((flag) => flag.code)).toEqual(["encoding_guessed"]);
  });
});
