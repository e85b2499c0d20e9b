import Papa from "papaparse";
import { EngineError, quoted } from "#app/engine/errors.ts";
import { isUnitText } from "#app/engine/math/units.ts";
import { type Decoded, textOf } from "#app/engine/parse/decode.ts";
import { cellCount, MOST_COLUMNS, walkLines } from "#app/engine/parse/lines.ts";
import { isMissing, isNumber } from "#app/engine/parse/number.ts";
import type { Dialect, TableProtocol } from "#app/engine/types.ts";

/** How a file is laid out, and where its rows begin. */
export interface Layout {
  dialect: Dialect;
  /** Names, trimmed; a last empty one (trailing separator) is left out. */
  header: string[];
  units: string[];
  preamble: string[];
  /** The first rows that are not blank, as text. */
  rows: string[][];
  /** Separated by spaces, and several of them count as one (aligned columns). */
  runs: boolean;
  /** Offset in the decoded bytes of the first line after names and units, and its number. */
  dataOffset: number;
  dataLine: number;
}

/** What a first look reads of a file. */
export const HEAD_BYTES = 256 * 1024;
const GLANCE_BYTES = 64 * 1024;
const PREVIEW_ROWS = 20;
const PREAMBLE_LINES = 200;
/** Rows that are tried as names. */
const ROWS_TRIED = 2000;
/** Rows after a line that decide whether it can be the names above them. */
const ROWS_BELOW = 20;
/** Added to the rank of names that hold all that is looked for: they go before any others. */
const WANTED = 4;

/** A row that is not blank. */
interface Row {
  /** Physical line on which the row begins. */
  line: number;
  /** Physical line behind it. */
  nextLine: number;
  cells: string[];
}

/** What a cell holds under one decimal mark. */
const OTHER = 0;
const NUMBER = 1;
const MISSING = 2;

/** One reading of the head: a separator, a decimal mark and the row that holds the names. */
interface Reading {
  separator: Dialect["separator"];
  runs: boolean;
  decimal: Dialect["decimal"];
  rows: Row[];
  header: number;
  units: number | null;
  width: number;
  /** How well the names fit the rows below: higher is surer. */
  rank: number;
  /** Share of the table's cells that are numbers or missing. */
  share: number;
  numericColumns: number;
  /** A number with a decimal mark was seen, so the mark is known. */
  markSeen: boolean;
}

const SEPARATORS = [",", ";", "\t", "|", " "] as const;

/**
 * Finds separator, decimal mark, names and units in a file's first part.
 *
 * Each separator that occurs is tried with each decimal mark; the reading wins whose names stand
 * above rows of the same width, and then the one with the largest share of numbers.
 *
 * @param cut  the bytes are only a part of the file
 * @param wanted  names that are looked for: of several lines that could be the names, one that holds
 *   all of these is taken (a table of settings may stand above the recorded one)
 * @throws EngineError "unreadable" where no line of names stands above rows of numbers
 */
export function findLayout(
  decoded: Decoded,
  table: TableProtocol,
  cut: boolean,
  wanted: readonly string[] = [],
): Layout {
  const { bytes } = decoded;
  const sure = 3 + (wanted.length > 0 ? WANTED : 0);
  const forced = table.header_row;
  const start = forced === "auto" ? { offset: 0, line: 1 } : startOfLine(bytes, forced, cut);
  let best: { reading: Reading; text: string } | null = null;
  for (const size of [GLANCE_BYTES, HEAD_BYTES]) {
    const end = headEnd(bytes, start, size, cut);
    const text = textOf(bytes.subarray(start.offset, end), decoded.encoding).replace(
      /\r\n?/g,
      "\n",
    );
    const reading = bestReading(text, start.line, table, wanted);
    if (reading !== null && (best === null || reading.rank >= best.reading.rank)) {
      best = { reading, text };
    }
    if (end >= bytes.length) break;
    if (best !== null && best.reading.rank >= sure && best.reading.markSeen) break;
  }
  if (best === null) throw noNames(table);
  const { reading } = best;
  const named = reading.rows[reading.header] as Row;
  refuseMisfit(reading, named);
  const header = named.cells.slice(0, reading.width);
  const unitsRow = reading.units === null ? null : (reading.rows[reading.units] as Row);
  const body = reading.rows.slice((reading.units ?? reading.header) + 1);
  const { nextLine } = unitsRow ?? named;
  const data = walkLines(bytes, start.offset, start.line, (line) => line < nextLine);
  return {
    dialect: {
      encoding: decoded.encoding,
      separator: reading.separator,
      decimal: reading.decimal,
      headerLine: named.line,
      unitsLine: unitsRow?.line ?? null,
    },
    header,
    units: header.map((name, i) => unitOf(name, unitsRow?.cells[i])),
    preamble: preambleOf(decoded, named.line),
    rows: body.slice(0, PREVIEW_ROWS).map((row) => header.map((_, i) => row.cells[i] ?? "")),
    runs: reading.runs,
    dataOffset: data.offset,
    dataLine: data.line,
  };
}

function startOfLine(bytes: Uint8Array, wanted: number, cut: boolean) {
  const at = walkLines(bytes, 0, 1, (line) => line < wanted);
  if (at.line < wanted || at.offset >= bytes.length) {
    throw new EngineError(
      "unreadable",
      cut
        ? `Line ${wanted}, which is said to hold the names, lies beyond the file's first part.`
        : `The names are said to stand in line ${wanted}, but the file has only ${at.line - 1} lines.`,
    );
  }
  return at;
}

/** End of the part that is looked at: whole lines, at least three of them. */
function headEnd(
  bytes: Uint8Array,
  start: { offset: number; line: number },
  size: number,
  cut: boolean,
): number {
  let whole = start.offset;
  const { offset } = walkLines(bytes, start.offset, start.line, (line, at) => {
    whole = at;
    return at - start.offset < size || line < start.line + 3;
  });
  if (offset < bytes.length) return offset;
  // The walk came to the end: in a part of a file the last line may be half a line.
  return cut && whole > start.offset ? whole : bytes.length;
}

function bestReading(
  text: string,
  firstLine: number,
  table: TableProtocol,
  wanted: readonly string[],
): Reading | null {
  const separators =
    table.separator === "auto" ? SEPARATORS.filter((s) => text.includes(s)) : [table.separator];
  const decimals: Dialect["decimal"][] =
    table.decimal !== "auto" ? [table.decimal] : text.includes(",") ? [".", ","] : ["."];
  const forced = table.header_row !== "auto";
  const dialects = separators.flatMap((separator) => {
    const single = { separator, runs: false };
    return separator === " " ? [single, { separator, runs: true }] : [single];
  });
  const readings: Reading[] = [];
  for (const from of forced ? [0] : startsOf(text)) {
    const line = firstLine + newlinesIn([text.slice(0, from)]);
    for (const dialect of dialects) {
      const rows = rowsOf(text.slice(from), line, dialect.separator, dialect.runs);
      for (const decimal of decimals) {
        if (forced && rows[0]?.line !== firstLine) continue;
        const reading = read(rows, { ...dialect, decimal }, forced, wanted);
        if (reading !== null) readings.push(reading);
      }
    }
    if (readings.some((reading) => reading.rank >= 2)) break;
  }
  readings.sort(
    (a, b) => b.rank - a.rank || b.share - a.share || b.numericColumns - a.numericColumns,
  );
  return readings[0] ?? null;
}

/**
 * Where to begin reading: at the top, or, should that find nothing, behind one of the first lines
 * with a quote that is not closed in them (a remark such as `"rest` would swallow the table).
 */
function startsOf(text: string): number[] {
  const starts = [0];
  if (text.length > 2 * GLANCE_BYTES) return starts;
  let offset = 0;
  for (const line of text.split("\n", 100)) {
    offset += line.length + 1;
    if (line.split('"').length % 2 === 0 && starts.length < 8) starts.push(offset);
  }
  return starts;
}

function rowsOf(
  text: string,
  firstLine: number,
  separator: Dialect["separator"],
  runs: boolean,
): Row[] {
  const prepared = runs
    ? text.replace(/ +/g, " ").replace(/^ | $/gm, "")
    : separator === " "
      ? text
      : text.replaceAll(new RegExp(`(^|[${separator}]) +"(?!")`, "gm"), '$1"');
  // papaparse looks for the next separator anew at each stray quote: keep it from very long lines
  // that are full of them.
  if (text.length > HEAD_BYTES && text.length * text.split('"').length > 4e10) return [];
  const parsed = Papa.parse<string[]>(prepared, { delimiter: separator, newline: "\n" });
  let line = firstLine;
  const rows: Row[] = [];
  for (const raw of parsed.data) {
    const nextLine = line + 1 + newlinesIn(raw);
    const cells = raw.slice(0, MOST_COLUMNS + 2).map((cell) => cell.trim());
    if (cells.length > 1 || cells[0] !== "") rows.push({ line, nextLine, cells });
    line = nextLine;
  }
  return rows;
}

function newlinesIn(texts: readonly string[]): number {
  let count = 0;
  for (const text of texts) {
    for (let at = text.indexOf("\n"); at >= 0; at = text.indexOf("\n", at + 1)) count++;
  }
  return count;
}

/** As many cells as the header, or one more that is empty (one trailing separator). */
function fits(cells: readonly string[], width: number): boolean {
  return cells.length === width || (cells.length === width + 1 && cells[width] === "");
}

function read(
  rows: Row[],
  dialect: { separator: Dialect["separator"]; runs: boolean; decimal: Dialect["decimal"] },
  forced: boolean,
  wanted: readonly string[],
): Reading | null {
  const kinds = rows.map(({ cells }) =>
    Uint8Array.from(cells, (cell) =>
      isNumber(cell, dialect.decimal) ? NUMBER : isMissing(cell) ? MISSING : OTHER,
    ),
  );
  let best: { header: number; names: Names } | null = null;
  const tried = Math.min(rows.length, forced ? 1 : ROWS_TRIED);
  for (let header = 0; header < tried; header++) {
    const names = namesAt(rows, kinds, header, forced, wanted);
    if (names === null) continue;
    // The first of the highest rank; where nothing fits, the last above the numbers is to blame.
    const nearer = names.rank === 0 && best?.names.rank === 0;
    if (best === null || names.rank > best.names.rank || nearer) best = { header, names };
    if (best.names.rank === 4 + (wanted.length > 0 ? WANTED : 0)) break;
  }
  if (best === null) return null;
  const { header, names } = best;
  return {
    ...dialect,
    rows,
    header,
    ...names,
    ...shareOf(rows, kinds, header, names, dialect.decimal),
  };
}

interface Names {
  width: number;
  units: number | null;
  rank: number;
  numericColumns: number;
}

/**
 * Whether row `at` can be the names of the rows below it.
 *
 * Ranks: 4 names above rows of numbers; 3 the same, but fewer than five rows of them before another
 * kind of row (a small table above the recorded one gives way to that), or a column without a name
 * (an index); 2 names, and most of the rows below are of numbers; 1 some of the names are whole
 * numbers; 0 names, but the rows below do not fit them. Names that hold all that is looked for rank
 * `WANTED` higher.
 */
function namesAt(
  rows: Row[],
  kinds: Uint8Array[],
  at: number,
  forced: boolean,
  wanted: readonly string[],
): Names | null {
  const { cells } = rows[at] as Row;
  const isWanted = wanted.length > 0 && wanted.every((name) => cells.includes(name));
  const width = widthOf(rows, at);
  if (width < 2 && !forced) return null;
  const isName = cells.slice(0, width).map((cell) => cell !== "" && !looksNumeric(cell));
  const hasWord = isName.some((name, c) => name && !isMissing(cells[c] as string));
  if (!hasWord && !isWanted) return null;

  const below: number[] = [];
  for (let i = at + 1; i < rows.length && i <= at + ROWS_BELOW + 1; i++) below.push(i);
  const first = below[0];
  const units = first !== undefined && isUnitsRow((rows[first] as Row).cells, width) ? first : null;
  if (units !== null) below.shift();
  const fitting = below.filter((i) => fits((rows[i] as Row).cells, width));
  const kind = (i: number, column: number): number => kinds[i]?.[column] as number;
  const numeric: number[] = [];
  for (let c = 0; c < width; c++) {
    const numbers = fitting.filter((i) => kind(i, c) === NUMBER).length;
    const missing = fitting.filter((i) => kind(i, c) === MISSING).length;
    if (numbers > 0 && 2 * (numbers + missing) >= fitting.length) numeric.push(c);
  }
  const found = { width, units, numericColumns: numeric.length };

  if (numeric.length === 0 || 2 * fitting.length < below.length) {
    const numbersBelow = below[0] !== undefined && kinds[below[0]]?.includes(NUMBER) === true;
    return forced || (numbersBelow && !isName.includes(false)) ? { ...found, rank: 0 } : null;
  }
  const isData = (i: number): boolean =>
    fits((rows[i] as Row).cells, width) &&
    numeric.every((c) => kind(i, c) !== OTHER) &&
    numeric.some((c) => kind(i, c) === NUMBER);
  const other = below.findIndex((i) => !isData(i));
  const run = other < 0 ? below.length : other;
  const above = isWanted ? WANTED : 0;
  if (numeric.every((c) => isName[c] || cells[c] === "")) {
    const certain = (run >= 5 || other < 0) && !cells.slice(0, width).includes("");
    if (run > 0) return { ...found, rank: above + (certain ? 4 : 3) };
    return 2 * below.filter(isData).length >= below.length ? { ...found, rank: above + 2 } : null;
  }
  const words = numeric.filter((c) => isName[c]).length;
  const oddNames =
    words >= 2 && run > 0 && numeric.every((c) => isName[c] || /^\d+$/.test(cells[c] as string));
  return oddNames || forced || (isWanted && run > 0) ? { ...found, rank: above + 1 } : null;
}

/** Cells of a row of names; a last empty one is a trailing separator's unless the rows below fill it. */
function widthOf(rows: Row[], at: number): number {
  const { cells } = rows[at] as Row;
  const width = cells.length;
  if (width < 2 || cells.at(-1) !== "") return width;
  const below = rows.slice(at + 1, at + 1 + ROWS_BELOW);
  const filled = below.filter((row) => row.cells.length === width && row.cells.at(-1) !== "");
  return 2 * filled.length > below.length ? width : width - 1;
}

/** A number with whichever decimal mark. */
function looksNumeric(text: string): boolean {
  return isNumber(text, ".") || isNumber(text, ",");
}

function isUnitsRow(cells: readonly string[], width: number): boolean {
  if (!fits(cells, width)) return false;
  const written = cells.filter((cell) => cell !== "");
  const units = written.filter((cell) => isUnitText(cell) || /^(\[.*\]|\(.*\))$/.test(cell));
  const certain = units.some((cell) => cell !== "1" && cell !== "-");
  return (
    certain &&
    2 * units.length >= written.length &&
    written.every((cell) => cell === "1" || !looksNumeric(cell))
  );
}

/** Share of numbers and missing cells over all rows of the head that have the table's width. */
function shareOf(
  rows: Row[],
  kinds: Uint8Array[],
  header: number,
  { units, width }: Names,
  decimal: Dialect["decimal"],
): { share: number; markSeen: boolean } {
  let cells = 0;
  let good = 0;
  let markSeen = false;
  for (let i = (units ?? header) + 1; i < rows.length; i++) {
    const row = (rows[i] as Row).cells;
    if (!fits(row, width)) continue;
    cells += width;
    for (let c = 0; c < width; c++) {
      const kind = kinds[i]?.[c];
      if (kind !== OTHER) good++;
      markSeen ||= kind === NUMBER && (row[c] as string).includes(decimal);
    }
  }
  return { share: cells === 0 ? 0 : good / cells, markSeen };
}

/** The unit below a name, else the one in brackets behind it. */
function unitOf(name: string, below: string | undefined): string {
  const written = (below ?? "").replace(/^[[(]\s*(.*?)\s*[\])]$/, "$1");
  if (written !== "") return written;
  const inBrackets = /[[(]\s*([^[\]()]*?)\s*[\])]$/.exec(name)?.[1] ?? "";
  return isUnitText(inBrackets) ? inBrackets : "";
}

function preambleOf(decoded: Decoded, headerLine: number): string[] {
  const { bytes, encoding } = decoded;
  const end = walkLines(
    bytes,
    0,
    1,
    (line, offset) => line < headerLine && line <= PREAMBLE_LINES && offset < GLANCE_BYTES,
  );
  const lines = textOf(bytes.subarray(0, end.offset), encoding).split(/\r\n|\r|\n/);
  return lines.slice(0, end.line - 1);
}

function refuseMisfit(reading: Reading, named: Row): void {
  const { width, rows, header, units } = reading;
  if (width > MOST_COLUMNS) {
    throw new EngineError(
      "unreadable",
      `Line ${named.line} has more than ${MOST_COLUMNS} columns, which is the most that can be read.`,
      { line: named.line },
    );
  }
  if (reading.rank > 0) return;
  const misfit = rows.slice((units ?? header) + 1).find((row) => !fits(row.cells, width));
  if (misfit === undefined) {
    throw new EngineError(
      "unreadable",
      `No rows of numbers stand below the names in line ${named.line}.`,
      { line: named.line },
    );
  }
  throw new EngineError(
    "unreadable",
    `Line ${misfit.line} has ${cellCount(misfit.cells.length)}, but the names in line ${named.line} are ${width}: ${named.cells.slice(0, 6).map(quoted).join(", ")}${width > 6 ? " …" : ""}.`,
    { line: misfit.line },
  );
}

function noNames(table: TableProtocol): EngineError {
  return new EngineError(
    "unreadable",
    table.header_row === "auto"
      ? "No line of column names was found above rows of numbers; write the names in one line above them, or state that line's number (header_row)."
      : `Line ${table.header_row} holds no column names; state the line that does (header_row).`,
    table.header_row === "auto" ? {} : { line: table.header_row },
  );
}
