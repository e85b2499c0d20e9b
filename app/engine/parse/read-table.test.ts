import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { previewTable } from "#app/engine/parse/preview.ts";
import { checkFirstPart, readTable } from "#app/engine/parse/read-table.ts";
import type { TableProtocol } from "#app/engine/types.ts";

const AUTO: TableProtocol = { separator: "auto", decimal: "auto", header_row: "auto" };
const NAMES = ["t", "ang", "trq"];

function read(text: string, columns: string[] = NAMES, table: Partial<TableProtocol> = {}) {
  return readTable(new TextEncoder().encode(text), { ...AUTO, ...table }, columns);
}

function columnOf(text: string, name: string, table: Partial<TableProtocol> = {}): number[] {
  return [...(read(text, [name], table).columns.get(name) ?? [])];
}

function refusal(text: string, columns = NAMES, table: Partial<TableProtocol> = {}) {
  try {
    read(text, columns, table);
  } catch (error) {
    const { name, message, line } = error as { name: string; message: string; line: number | null };
    return { name, message, line };
  }
  throw new Error("was not refused");
}

/** Names and `before` good rows, then the line given, then more good rows. */
function around(line: string, before = 5): string {
  const good = (n: number) => Array.from({ length: n }, (_, i) => `${i},0.5,-1.25\n`).join("");
  return `t,ang,trq\n${good(before)}${line}\n${good(30)}`;
}

describe("readTable", () => {
  it("reads the mapped columns only, raw, with names, units and the first row's line", () => {
    const table = read(
      "remark\nt,side,ang,trq\nms,,deg,N.m\n0,left,0.5,1e-3\n1,,.25,-2.\n2,x,-1,+3\n",
    );
    expect(table.rows).toBe(3);
    expect([...table.columns.keys()]).toEqual(NAMES);
    expect([...table.columns.values()].map((c) => [...c])).toEqual([
      [0, 1, 2],
      [0.5, 0.25, -1],
      [0.001, -2, 3],
    ]);
    expect(table).toMatchObject({
      header: ["t", "side", "ang", "trq"],
      units: ["ms", "", "deg", "N.m"],
      firstDataLine: 4,
      skippedLines: [],
      flags: [],
    });
  });

  it("takes names with blanks around them and tells small from capital letters", () => {
    expect(columnOf("t, ang ,Ang\n0,1,2\n1,3,4\n", "ang")).toEqual([1, 3]);
    expect(columnOf("t, ang ,Ang\n0,1,2\n1,3,4\n", "Ang")).toEqual([2, 4]);
  });

  it("reads beside columns without a name: an index first, one in the middle, one at the end", () => {
    const rows = Array.from({ length: 30 }, (_, i) => `${i},7,0.5,x,-1.25`).join("\n");
    for (const names of [",t,ang,,trq", "i,t,,ang,trq", "t,,ang,trq,"]) {
      const table = read(`${names}\n${rows.replaceAll(",x", ",8")}\n`);
      expect(table.header).toEqual(names.split(","));
      expect([...table.columns.values()].map((column) => column.length)).toEqual([30, 30, 30]);
    }
    expect(read(`t,ang,trq,,\n${rows}\n`).header).toHaveLength(5);
  });

  it("finds the line that names what is mapped below a table of settings as wide", () => {
    const settings = `ch,gain,off\n${"1,2,3\n".repeat(8)}\n`;
    const table = read(`${settings}t,ang,trq\n${"0,0.5,1\n".repeat(30)}`);
    expect(table.dialect.headerLine).toBe(11);
    expect(table.rows).toBe(30);
  });

  it("takes whole numbers for names where they are what is mapped", () => {
    const rows = "0,0.5,1\n".repeat(30);
    expect(read(`t,1,2\n${rows}`, ["t", "1", "2"]).rows).toBe(30);
    expect(read(`0,1,2\n${rows}`, ["0", "1", "2"], { header_row: 1 }).rows).toBe(30);
  });

  it("never takes a first row of missing cells for the names", () => {
    const rows = "0,0.5,1\n".repeat(30);
    for (const first of [",nan,nan", "NaN,NaN,NaN", "-,NA,n/a", "null,,"]) {
      const table = read(`t,ang,trq\n${first}\n${rows}`);
      expect(table.rows).toBe(31);
      expect([...(table.columns.get("ang") ?? [])].slice(0, 2)).toEqual([Number.NaN, 0.5]);
    }
  });

  it("refuses a mapped name that is missing and says which there are", () => {
    expect(refusal("x\nt,ang,Trq\n0,1,2\n1,2,3\n")).toEqual({
      name: "unreadable",
      line: 2,
      message: 'The column "trq" is missing; line 2 names "t", "ang", "Trq".',
    });
  });

  it("refuses a mapped name that stands twice, and lets others repeat", () => {
    const text = "t,ang,trq,ang,emg,emg\n0,1,2,3,x,x\n1,2,3,4,x,x\n";
    expect(refusal(text)).toMatchObject({
      line: 1,
      message: expect.stringMatching(/Two columns.*"ang"/),
    });
    expect(read(text, ["t", "trq"]).rows).toBe(2);
  });

  it.each(["", "NaN", "nan", "NA", "n/a", "N/A", "null", "NULL", "-", " ", '""', '"NaN"', " na "])(
    "takes %j for a missing cell",
    (cell) => {
      const values = columnOf(around(`5,${cell},1`), "ang");
      expect(values[5]).toBeNaN();
      expect(values.filter(Number.isNaN)).toHaveLength(1);
    },
  );

  it.each([
    "abc",
    "0x10",
    "0b1",
    "1e999",
    "inf",
    "-Infinity",
    "1_000",
    "1 000",
    "1.2.3",
    "1e",
    "1e+",
    "e5",
    ".",
    "+",
    "--1",
    "1-",
    "1.5N",
    "1d5",
    "−1",
    "1e12.5",
    "1000000000001",
    "-1.1e12",
    "NaNs",
    "#N/A",
    '"1,000"',
    '"1.5"x',
    '"1.5',
  ])("refuses %j in a mapped column with its line", (cell) => {
    expect(refusal(around(`5,${cell},1`))).toMatchObject({ name: "unreadable", line: 7 });
  });

  it("says which cell of which column is no number", () => {
    expect(refusal(around("5,12 deg,1")).message).toBe(
      'Line 7 holds "12 deg" in column "ang", which is not a number of at most 1e12 in size.',
    );
  });

  it("reads values up to 1e12 and numbers too small for a double", () => {
    expect(columnOf(around("5,-1e12,1"), "ang")[5]).toBe(-1e12);
    expect(columnOf(around("5,1e-999,1"), "ang")[5]).toBe(0);
    expect(columnOf(around("5,-0,1"), "ang")[5]).toBe(-0);
  });

  it("leaves text alone in columns that are not mapped", () => {
    expect(read(around("5,0x10,1"), ["t", "trq"]).rows).toBe(36);
  });

  it.each(["5,0.5", "5", "5,0.5,1,2", "5,0.5,1,2,", "5;0.5;1", "5,0.5,1,,"])(
    "refuses the row %j, which has another number of cells, with its line",
    (row) => {
      expect(refusal(around(row))).toMatchObject({
        line: 7,
        message: expect.stringMatching(/^Line 7 has \d cells?, but the names in line 1 are 3\.$/),
      });
    },
  );

  it("allows one trailing separator", () => {
    expect(columnOf(around("5,0.5,1,"), "trq")[5]).toBe(1);
    expect(columnOf(around("5,0.5,1, "), "trq")[5]).toBe(1);
    expect(columnOf(around("5,0.5,"), "trq")[5]).toBeNaN();
    expect(columnOf("t,ang,trq,\n0,1,2,\n1,2,3\n2,3,4,\n", "trq")).toEqual([2, 3, 4]);
  });

  it("drops a last line without a line end and with too few cells, and flags it", () => {
    for (const rest of ["36,0.", "36", "36,abc", "36,1e", '36,"0.5']) {
      const table = read(around("5,0.5,1") + rest);
      expect(table.rows).toBe(36);
      expect(table.flags.map((flag) => flag.code)).toEqual(["truncated"]);
    }
  });

  it("keeps a last line without a line end that has all its cells", () => {
    const table = read(`${around("5,0.5,1")}36,0.5,7`);
    expect(table.columns.get("trq")?.at(-1)).toBe(7);
    expect(table.flags).toEqual([]);
  });

  it("refuses a bad cell, too many cells or too few of them where the last line is whole", () => {
    expect(refusal(`${around("5,0.5,1")}36,abc,7`).line).toBe(38);
    expect(refusal(`${around("5,0.5,1")}36,1,7,8`).line).toBe(38);
    expect(refusal(`${around("5,0.5,1")}36,1\n`).line).toBe(38);
  });

  it("tells the physical line with a preamble, blank lines, CR LF and line ends in quotes", () => {
    const good = (n: number) => Array.from({ length: n }, (_, i) => `${i},a,0.5,1`);
    const lines = [
      "remark",
      "",
      "t,note,ang,trq",
      "ms,,deg,N.m",
      "",
      ...good(3),
      "",
      "  ",
      ...good(2),
    ];
    lines.push('5,"two', 'lines, ""one""', 'cell",0.5,1', ...good(2));
    expect(refusal([...lines, "x,a,1,1", ...good(9), ""].join("\r\n")).line).toBe(18);
    const table = read([...lines, "", ""].join("\r\n"));
    expect(table).toMatchObject({ rows: 8, firstDataLine: 6, skippedLines: [9, 10, 14, 15] });
    expect([...(table.columns.get("t") ?? [])]).toEqual([0, 1, 2, 0, 1, 5, 0, 1]);
  });

  it("names the line inside a row of several lines on which a bad cell stands", () => {
    const text = `t,note,ang,trq\n${"0,a,1,2\n".repeat(6)}1,"b\nc\nd",x,2\n`;
    expect(refusal(text).line).toBe(10);
  });

  it.each(["\n", "\r\n", "\r"])("reads lines that end with %j", (end) => {
    const text = ["t,ang,trq", "0,1,2", "1,3,4", "2,5,6", ""].join(end);
    expect(columnOf(text, "ang")).toEqual([1, 3, 5]);
    expect(columnOf(text, "trq")).toEqual([2, 4, 6]);
  });

  it("reads quoted cells, blanks round cells and doubled quotes", () => {
    const text = '"t", "ang" ,"a ""b"""\n"0" , "1.5","x, ""y"""\n 1 ,2 ,"z"\n"2","-3e1",""\n';
    expect(columnOf(text, "t")).toEqual([0, 1, 2]);
    expect(columnOf(text, "ang")).toEqual([1.5, 2, -30]);
    expect(() => read(text, ['a "b"'])).toThrow(/Line 2 holds "x, "y""/);
  });

  it("reads decimal commas, in quoted cells between commas too, and refuses points there", () => {
    const semicolons = "t;ang;trq\n0;1,5;-,25\n1;2,;1,5e-3\n2;3;4\n";
    expect(columnOf(semicolons, "ang")).toEqual([1.5, 2, 3]);
    expect(columnOf(semicolons, "trq")).toEqual([-0.25, 0.0015, 4]);
    const commas = 't,ang,trq\n0,"1,5","2,25"\n1,"-0,5",3\n2,"1,123456789012345678","4,5"\n';
    expect(columnOf(commas, "ang")).toEqual([1.5, -0.5, 1.1234567890123457]);
    expect(columnOf(commas, "trq")).toEqual([2.25, 3, 4.5]);
    const bad = `t;ang;trq\n${"0;1,5;2\n".repeat(8)}1;2.5;3\n`;
    expect(refusal(bad)).toMatchObject({ line: 10 });
  });

  it("reads spaces that align columns and single spaces with empty cells between", () => {
    const aligned = "  t  ang   trq\n  0  1.5     2\n 10 -1.5    20 \n100  3  4\n";
    expect(columnOf(aligned, "t")).toEqual([0, 10, 100]);
    expect(columnOf(aligned, "trq")).toEqual([2, 20, 4]);
    expect(columnOf("t ang trq\n0  2\n1 5 3\n2 6 4\n", "ang")).toEqual([Number.NaN, 5, 6]);
  });

  it("takes a row of separators for missing cells and a row of blanks for none", () => {
    const table = read("t,ang,trq\n0,1,2\n,,\n   \n1,2,3\n");
    expect([...(table.columns.get("ang") ?? [])]).toEqual([1, Number.NaN, 2]);
    const tabs = read("t\tang\ttrq\n0\t1\t2\n\t\t\n1\t2\t3\n");
    expect([...(tabs.columns.get("ang") ?? [])]).toEqual([1, Number.NaN, 2]);
  });

  it("reads UTF-16 and Windows-1252, and flags the guess", () => {
    const text = "t,W°\n0,1\n1,2\n";
    const sixteen = new Uint8Array(2 + 2 * text.length);
    sixteen.set([0xff, 0xfe]);
    for (let i = 0; i < text.length; i++) sixteen[2 + 2 * i] = text.charCodeAt(i);
    const wide = readTable(sixteen, AUTO, ["W°"]);
    expect(wide.dialect.encoding).toBe("utf-16le");
    expect([...(wide.columns.get("W°") ?? [])]).toEqual([1, 2]);
    const narrow = readTable(
      Uint8Array.from(text, (letter) => letter.charCodeAt(0)),
      AUTO,
      ["W°"],
    );
    expect(narrow.flags.map((flag) => flag.code)).toEqual(["encoding_guessed"]);
  });

  it("refuses a quote that is not closed, with the line on which it opens", () => {
    const good = "0,a,1,2\n".repeat(20);
    const message = "A quote that opens in line 22 is not closed.";
    const text = `t,note,ang,trq\n${good}1,"b,1,2\n${good}`;
    expect(refusal(text)).toMatchObject({ line: 22, message });
    expect(refusal(`${text}1,b,2`)).toMatchObject({ line: 22, message });
    expect(refusal(text + good.repeat(9000))).toMatchObject({ line: 22, message });
  });

  it("refuses a line over 1 MiB, wherever it stands", () => {
    const long = "x".repeat(1024 * 1024 + 1);
    const wanted = { name: "unreadable", message: expect.stringMatching(/longer than 1 MiB/) };
    expect(refusal(long)).toMatchObject({ ...wanted, line: 1 });
    expect(refusal(`${long}\nt,ang,trq\n0,1,2\n`)).toMatchObject({ ...wanted, line: 1 });
    const text = "t,note,ang,trq\n0,a,1,2\n1,a,2,3\n2,a,3,4\n";
    expect(refusal(`${text}3,${long},1,2\n${text}`)).toMatchObject({ ...wanted, line: 5 });
    expect(refusal(`${text}3,${long}`)).toMatchObject({ ...wanted, line: 5 });
    expect(refusal(`${text}${" ".repeat(1024 * 1024 + 1)}\n`)).toMatchObject({
      ...wanted,
      line: 5,
    });
    expect(read(`${text}3,${"x".repeat(1024 * 1024 - 10)},1,2\n`).rows).toBe(4);
  });

  it("reads 4 096 columns and refuses one more", () => {
    const wide = (n: number) => {
      const line = (cell: (i: number) => string) =>
        Array.from({ length: n }, (_, i) => cell(i)).join(",");
      return `${line((i) => `column_of_the_plate_${i}`)}\n${`${line(String)}\n`.repeat(4)}`;
    };
    expect(columnOf(wide(4096), "column_of_the_plate_4095")).toEqual([4095, 4095, 4095, 4095]);
    expect(refusal(wide(4097), ["column_of_the_plate_0"])).toMatchObject({
      line: 1,
      message: "Line 1 has more than 4096 columns, which is the most that can be read.",
    });
  });

  it("refuses names without rows", () => {
    expect(refusal("t,ang,trq\n").name).toBe("unreadable");
    expect(refusal("t,ang,trq\nms,deg,N.m\n").name).toBe("unreadable");
  });

  it("grows beyond the number of rows that the first ones promise", () => {
    const text = `t,ang,trq\n${"0.123456789012,1.123456789012,2.1234567890123\n".repeat(3000)}${"1,2,3\n".repeat(40000)}`;
    const table = read(text);
    expect(table.rows).toBe(43000);
    expect(table.columns.get("trq")?.at(-1)).toBe(3);
  });

  it("sees in a whole file what the preview saw in its first part", () => {
    const rows = Array.from({ length: 20000 }, (_, i) => `${i};${i / 8};-1`.replace(".", ","));
    const file = new TextEncoder().encode(`remark\n\nt;ang;trq\nms;deg;N.m\n${rows.join("\n")}\n`);
    const first = previewTable(file.subarray(0, 262144), AUTO);
    const whole = readTable(file, AUTO, NAMES);
    expect(whole.dialect).toEqual(first.dialect);
    expect(whole.units).toEqual(first.units);
    expect(whole.rows).toBe(20000);
  });
});

/** Decimal texts in every form that is a number, from short ones to more digits than a double holds. */
const decimalText = fc
  .tuple(
    fc.constantFrom("", "-", "+"),
    fc.stringMatching(/^\d{1,25}$/),
    fc.option(fc.stringMatching(/^\d{0,25}$/), { nil: null }),
    fc.option(
      fc.tuple(
        fc.constantFrom("e", "E"),
        fc.constantFrom("", "+", "-"),
        fc.integer({ min: 0, max: 40 }),
      ),
      {
        nil: null,
      },
    ),
  )
  .map(([sign, whole, fraction, power]) => {
    const exponent = power === null ? "" : power.join("");
    return `${sign}${whole}${fraction === null ? "" : `.${fraction}`}${exponent}`;
  })
  .filter((text) => Math.abs(Number(text)) <= 1e12);

const dialect = fc.record({
  separator: fc.constantFrom(",", ";", "\t", "|", " "),
  comma: fc.boolean(),
  quotes: fc.boolean(),
  end: fc.constantFrom("\n", "\r\n", "\r"),
  lastEnd: fc.boolean(),
  padding: fc.constantFrom("", " "),
});

describe("the scanner and Number", () => {
  it("agree to the last bit for decimal texts in any dialect", () => {
    fc.assert(
      fc.property(
        fc.array(fc.tuple(decimalText, decimalText), { minLength: 3, maxLength: 40 }),
        dialect,
        (values, { separator, comma, quotes, end, lastEnd, padding }) => {
          const pad = separator === " " ? "" : padding;
          const quote = quotes || (comma && separator === ",") ? '"' : "";
          const cell = (text: string) =>
            `${pad}${quote}${comma ? text.replace(".", ",") : text}${quote}${pad}`;
          const lines = values.map((pair) => pair.map(cell).join(separator));
          const text = [["a", "b"].join(separator), ...lines].join(end) + (lastEnd ? end : "");
          const table = read(text, ["a", "b"], {
            separator: separator as TableProtocol["separator"],
            decimal: comma ? "," : ".",
          });
          const found = values.map((_, i) => [
            table.columns.get("a")?.[i],
            table.columns.get("b")?.[i],
          ]);
          expect(found).toEqual(values.map((pair) => pair.map(Number)));
        },
      ),
      { numRuns: 400 },
    );
  });

  it("agree for every double as it is printed", () => {
    const printed = fc
      .double({ min: -1e12, max: 1e12, noNaN: true })
      .filter((value) => !Object.is(value, -0)); // printed without its sign
    fc.assert(
      fc.property(
        fc.array(printed, {
          minLength: 3,
          maxLength: 60,
        }),
        (values) => {
          const table = read(`a,b\n${values.map((v) => `${v},${v.toPrecision(17)}\n`).join("")}`, [
            "a",
            "b",
          ]);
          expect([...(table.columns.get("a") ?? [])]).toEqual(values);
          expect([...(table.columns.get("b") ?? [])]).toEqual(values);
        },
      ),
      { numRuns: 300 },
    );
  });

  it("never take for a number what Number does not, and never crash", () => {
    fc.assert(
      fc.property(fc.stringMatching(/^[-+.,eE0-9xnaiNf_ ]{0,12}$/), (cell) => {
        const text = `a;b\n0;1.5\n1;2.5\n2;${cell}\n3;4.5\n`;
        let value: number | undefined;
        try {
          value = columnOf(text, "b", { separator: ";", decimal: "." })[2];
        } catch (error) {
          expect(error).toMatchObject({ name: "unreadable", line: 4 });
          return;
        }
        const trimmed = cell.trim();
        if (Number.isNaN(value)) expect(["", "nan", "na", "-"]).toContain(trimmed.toLowerCase());
        else expect(value).toBe(Number(trimmed));
      }),
      { numRuns: 2000 },
    );
  });
});

it("a number of half a million digits is one", () => {
  const long = `0.${"1".repeat(500_000)}`;
  expect(columnOf(`a,b\n0,${long}\n1,2\n`, "b")).toEqual([Number(long), 2]);
});

describe("checkFirstPart", () => {
  const part = (text: string, columns = NAMES, table: Partial<TableProtocol> = {}) =>
    checkFirstPart(new TextEncoder().encode(text), { ...AUTO, ...table }, columns);
  const rows = "0,0.5,1\n".repeat(40_000);

  it("lets pass what may be a recording, cut anywhere", () => {
    expect(() => part(`t,ang,trq\n${rows}`.slice(0, 300_001))).not.toThrow();
    expect(() => part(`x\n${rows}`, NAMES, { header_row: 90_000 })).not.toThrow();
  });

  it("refuses a byte of zero, a part without names and one without a mapped name", () => {
    expect(() => part(`t,ang,trq\n${rows}\0`)).toThrow(/byte of zero/);
    expect(() => part(rows)).toThrow(/column names/);
    expect(() => part(`t,ang,x\n${rows}`)).toThrow(/"trq" is missing/);
  });
});

describe("any bytes", () => {
  it("are read or refused in a sentence of one line", () => {
    const bytes = fc.oneof(
      fc.uint8Array({ maxLength: 300 }),
      fc
        .array(
          fc.constantFrom("t", "ang", "1", "2.5", ",", ";", '"', "\n", "\r\n", " ", "-", "ms", "é"),
          { maxLength: 120 },
        )
        .map((parts) => new TextEncoder().encode(parts.join(""))),
    );
    fc.assert(
      fc.property(bytes, (file) => {
        try {
          readTable(file, AUTO, ["t", "ang"]);
        } catch (error) {
          expect((error as Error).name).toBe("unreadable");
          expect((error as Error).message).toMatch(/^[^\n\r]+\.$/);
        }
      }),
      { numRuns: 1500 },
    );
  });
});
