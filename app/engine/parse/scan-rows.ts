import { EngineError, quoted } from "#app/engine/errors.ts";
import { textOf } from "#app/engine/parse/decode.ts";
import type { Layout } from "#app/engine/parse/layout.ts";
import {
  afterLineEnd,
  cellCount,
  LONGEST_LINE,
  lineEndFrom,
  refuseLongLine,
} from "#app/engine/parse/lines.ts";
import { LARGEST_VALUE, numberOf } from "#app/engine/parse/number.ts";

const TAB = 0x09;
const LF = 0x0a;
const CR = 0x0d;
const SPACE = 0x20;
const QUOTE = 0x22;
const PLUS = 0x2b;
const MINUS = 0x2d;
const ZERO = 0x30;
const NINE = 0x39;
const LARGE_E = 0x45;
const SMALL_E = 0x65;

/** Powers of ten that a double holds exactly. */
const TENS = Float64Array.of(
  1,
  1e1,
  1e2,
  1e3,
  1e4,
  1e5,
  1e6,
  1e7,
  1e8,
  1e9,
  1e10,
  1e11,
  1e12,
  1e13,
  1e14,
  1e15,
  1e16,
  1e17,
  1e18,
  1e19,
  1e20,
  1e21,
  1e22,
);
const EXACT_BELOW = 2 ** 53;

/** Blank lines and continued cells that may stand between rows; their lines are kept one by one. */
const MOST_SKIPPED_LINES = 10_000_000;

export interface Scan {
  rows: number;
  /** In the order of the slots, each `rows` long. */
  columns: Float64Array[];
  firstDataLine: number;
  skippedLines: number[];
  truncated: boolean;
}

interface Progress extends Scan {
  capacity: number;
  /** Physical line at which the next row begins. */
  line: number;
  /** Blank lines since the last row. */
  blankLines: number;
}

/**
 * Reads the rows below the names, straight from bytes into columns.
 *
 * @param slots  for each column of the file its place among the columns read, or −1
 * @throws EngineError "unreadable" at the first line that is wrong
 */
export function scanRows(
  bytes: Uint8Array,
  layout: Layout,
  slots: Int32Array,
  slotCount: number,
): Scan {
  const capacity = expectedRows(bytes, layout.dataOffset);
  const progress: Progress = {
    rows: 0,
    columns: Array.from({ length: slotCount }, () => new Float64Array(capacity)),
    firstDataLine: layout.dataLine,
    skippedLines: [],
    truncated: false,
    capacity,
    line: layout.dataLine,
    blankLines: 0,
  };
  let end = bytes.length;
  while (end > layout.dataOffset && bytes[end - 1] !== LF && bytes[end - 1] !== CR) end--;
  const reached = scanWholeLines(bytes, layout.dataOffset, end, layout, slots, progress, false);
  if (reached < bytes.length) scanLastRow(bytes.subarray(reached), layout, slots, progress);
  const { rows, firstDataLine, skippedLines, truncated } = progress;
  // A little room is left behind the last row: less than a copy costs.
  const columns = progress.columns.map((column) =>
    8 * rows > 7 * column.length ? column.subarray(0, rows) : column.slice(0, rows),
  );
  return { rows, columns, firstDataLine, skippedLines, truncated };
}

/** Rows that the file will have if they go on as they begin, and a few more. */
function expectedRows(bytes: Uint8Array, from: number): number {
  let lines = 0;
  let at = from;
  while (at < bytes.length && at < from + 65536) {
    at = afterLineEnd(bytes, lineEndFrom(bytes, at));
    lines++;
  }
  return Math.ceil((1.02 * (bytes.length - from) * lines) / Math.max(1, at - from)) + 16;
}

/** The last row where its line does not end, or where a quote in it stays open. */
function scanLastRow(
  rest: Uint8Array,
  layout: Layout,
  slots: Int32Array,
  progress: Progress,
): void {
  const firstEnd = lineEndFrom(rest, 0);
  if (firstEnd > LONGEST_LINE) refuseLongLine(progress.line);
  const oneLine = firstEnd === rest.length;
  const last = rest.at(-1);
  if (rest.length > LONGEST_LINE || last === LF || last === CR) refuseOpenQuote(progress.line);
  const ended = new Uint8Array(rest.length + 1);
  ended.set(rest);
  ended[rest.length] = LF;
  const reached = scanWholeLines(ended, 0, ended.length, layout, slots, progress, oneLine);
  if (reached === ended.length) return;
  if (!oneLine) refuseOpenQuote(progress.line);
  progress.truncated = true;
}

/**
 * Reads rows of which every line ends.
 *
 * @param to  bytes[to − 1] is a line end
 * @param cut  the row is the file's last and its line does not end: with too few cells it is left out
 * @returns `to`, or the start of a row that is cut or in which a quote stays open
 */
function scanWholeLines(
  bytes: Uint8Array,
  from: number,
  to: number,
  layout: Layout,
  slots: Int32Array,
  progress: Progress,
  cut: boolean,
): number {
  const { runs, dialect } = layout;
  const width = slots.length;
  const separator = dialect.separator.charCodeAt(0);
  const mark = dialect.decimal.charCodeAt(0);
  // Outside quotes a comma that separates is never a decimal mark.
  const bareMark = mark === separator ? -1 : mark;
  const pad = separator === SPACE ? -1 : SPACE;
  const { columns } = progress;
  let row = progress.rows;
  let line = progress.line;
  let p = from;

  while (p < to) {
    const rowStart = p;
    let c = bytes[p] as number;
    if (c <= SPACE) {
      let q = p;
      while (c === SPACE || (c === TAB && separator !== TAB)) c = bytes[++q] as number;
      if (c === LF || c === CR) {
        if (q - rowStart > LONGEST_LINE) refuseLongLine(line);
        p = afterLineEnd(bytes, q);
        line++;
        progress.blankLines++;
        continue;
      }
      if (runs) p = q;
    }
    if (row === progress.capacity) grow(progress);
    let rowLines = 1;
    let column = 0;
    for (;;) {
      const slot = slots[column] as number;
      c = bytes[p] as number;
      if (slot < 0 && c !== QUOTE && c !== pad) {
        while (c !== separator && c !== LF && c !== CR) c = bytes[++p] as number;
      } else {
        const cell = p;
        let plain = false;
        if (slot >= 0) {
          while (c === pad) c = bytes[++p] as number;
          const values = columns[slot] as Float64Array;
          if (c === QUOTE) {
            p = plainNumber(bytes, p + 1, mark, values, row);
            p = bytes[p] === QUOTE ? p + 1 : -1;
          } else p = plainNumber(bytes, p, bareMark, values, row);
          while (bytes[p] === pad) p++;
          c = bytes[p] as number;
          plain = p >= 0 && (c === separator || c === LF || c === CR);
        }
        if (!plain) {
          p = cellEnd(bytes, cell, to, separator);
          if (p < 0) return stopAt(progress, row, line, rowStart);
          if (slot >= 0) {
            const value = numberOf(cellText(bytes, cell, p, layout), dialect.decimal);
            if (value === null) {
              const cells = cellsIn(bytes, rowStart, to, layout);
              if (cut && cells < width) return rowStart;
              // One more may be a trailing separator's: then the cell itself is to blame.
              if (cells < width || cells > width + 1) {
                refuseWidth(line, cells, width, dialect.headerLine);
              }
              refuseCell(bytes, cell, p, layout, line + rowLines - 1, column);
            }
            (columns[slot] as Float64Array)[row] = value;
          }
          rowLines += lineEndsIn(bytes, cell, p);
        }
      }
      column++;
      if (bytes[p] !== separator) break;
      p++;
      if (runs) {
        while (bytes[p] === SPACE) p++;
        if (bytes[p] === LF || bytes[p] === CR) break;
      }
      if (column === width) {
        // One trailing separator may close the row.
        while (bytes[p] === pad) p++;
        if (bytes[p] !== LF && bytes[p] !== CR) column++;
        break;
      }
    }
    if (column !== width) {
      const cells = cellsIn(bytes, rowStart, to, layout);
      if (cut && cells < width) return rowStart;
      refuseWidth(line, cells, width, dialect.headerLine);
    }
    if (p - rowStart > LONGEST_LINE) refuseLongLine(line);
    p = afterLineEnd(bytes, p);
    if (row === 0) progress.firstDataLine = line;
    else if (progress.blankLines > 0) skipLines(progress, line - progress.blankLines, line);
    if (rowLines > 1) skipLines(progress, line + 1, line + rowLines);
    progress.blankLines = 0;
    line += rowLines;
    row++;
  }
  return stopAt(progress, row, line, p);
}

/**
 * Writes the number that begins at `at` to `values[row]`, as digits · 10^exponent. With digits below
 * 2^53 and an exponent within ± 22 both are exact, and one product or quotient rounds as `Number`
 * does (Clinger 1990); with more of either, `Number` itself reads the text.
 *
 * @param mark  code of the decimal mark, or −1
 * @returns the offset behind the number, −1 where none of at most 1e12 in size begins; what follows
 *   it is the caller's to look at
 */
function plainNumber(
  bytes: Uint8Array,
  at: number,
  mark: number,
  values: Float64Array,
  row: number,
): number {
  let p = at;
  let c = bytes[p] as number;
  const negative = c === MINUS;
  if (negative || c === PLUS) c = bytes[++p] as number;
  let value = 0;
  let start = p;
  while (c >= ZERO && c <= NINE) {
    value = value * 10 + (c - ZERO);
    c = bytes[++p] as number;
  }
  let digits = p - start;
  let exponent = 0;
  if (c === mark) {
    c = bytes[++p] as number;
    start = p;
    while (c >= ZERO && c <= NINE) {
      value = value * 10 + (c - ZERO);
      c = bytes[++p] as number;
    }
    exponent = start - p;
    digits -= exponent;
  }
  if (digits > 0 && (c === SMALL_E || c === LARGE_E)) {
    c = bytes[++p] as number;
    const down = c === MINUS;
    if (down || c === PLUS) c = bytes[++p] as number;
    start = p;
    let power = 0;
    while (c >= ZERO && c <= NINE) {
      if (power < 10000) power = power * 10 + (c - ZERO);
      c = bytes[++p] as number;
    }
    exponent += down ? -power : power;
    if (p === start) digits = 0;
  }
  if (digits === 0) return -1;
  if (value >= EXACT_BELOW || exponent < -22 || exponent > 22) {
    const text = textOf(bytes.subarray(at, p), "utf-8");
    value = Math.abs(Number(text.replace(",", ".")));
  } else if (exponent < 0) value /= TENS[-exponent] as number;
  else if (exponent > 0) value *= TENS[exponent] as number;
  if (value > LARGEST_VALUE) return -1;
  values[row] = negative ? -value : value;
  return p;
}

function stopAt(progress: Progress, rows: number, line: number, offset: number): number {
  progress.rows = rows;
  progress.line = line;
  return offset;
}

function grow(progress: Progress): void {
  progress.capacity = Math.ceil(progress.capacity * 1.5);
  progress.columns.forEach((column, i) => {
    const longer = new Float64Array(progress.capacity);
    longer.set(column);
    progress.columns[i] = longer;
  });
}

function skipLines(progress: Progress, from: number, to: number): void {
  const { skippedLines } = progress;
  if (skippedLines.length + to - from > MOST_SKIPPED_LINES) {
    throw new EngineError(
      "unreadable",
      `More than ${MOST_SKIPPED_LINES} lines up to line ${to} hold no row, so the file is not a table of recorded samples.`,
      { line: to },
    );
  }
  for (let line = from; line < to; line++) skippedLines.push(line);
}

/**
 * Where a cell ends: at a separator or line end outside quotes. A quote counts where the cell
 * begins, blanks aside.
 *
 * @returns −1 where the quote stays open for 1 MiB or to the end
 */
function cellEnd(bytes: Uint8Array, from: number, to: number, separator: number): number {
  let p = from;
  if (separator !== SPACE) while (bytes[p] === SPACE) p++;
  if (bytes[p] === QUOTE) {
    const limit = Math.min(to, from + LONGEST_LINE);
    p++;
    while (p < limit) {
      if (bytes[p] !== QUOTE) p++;
      else if (bytes[p + 1] === QUOTE) p += 2;
      else break;
    }
    if (p >= limit) return -1;
    p++;
  }
  let c = bytes[p];
  while (c !== separator && c !== LF && c !== CR) c = bytes[++p];
  return p;
}

function lineEndsIn(bytes: Uint8Array, from: number, to: number): number {
  let count = 0;
  for (let p = from; p < to; p++) {
    if (bytes[p] === LF || (bytes[p] === CR && bytes[p + 1] !== LF)) count++;
  }
  return count;
}

/** Trimmed, quotes taken off. */
function cellText(bytes: Uint8Array, from: number, to: number, layout: Layout): string {
  const cell = bytes.subarray(from, to);
  const ascii = cell.length < 64 && cell.every((byte) => byte < 0x80);
  const text = (
    ascii ? String.fromCharCode(...cell) : textOf(cell, layout.dialect.encoding)
  ).trim();
  return text.length >= 2 && text.startsWith('"') && text.endsWith('"')
    ? text.slice(1, -1).replaceAll('""', '"').trim()
    : text;
}

/** Cells of a row, a trailing separator's empty one counted. */
function cellsIn(bytes: Uint8Array, rowStart: number, to: number, layout: Layout): number {
  const separator = layout.dialect.separator.charCodeAt(0);
  let p = rowStart;
  let cells = 0;
  for (;;) {
    if (layout.runs) {
      while (bytes[p] === SPACE) p++;
      if (bytes[p] === LF || bytes[p] === CR) return cells;
    }
    cells++;
    p = cellEnd(bytes, p, to, separator);
    if (p < 0 || bytes[p] !== separator) return cells;
    p++;
  }
}

function refuseWidth(line: number, cells: number, width: number, headerLine: number): never {
  throw new EngineError(
    "unreadable",
    `Line ${line} has ${cellCount(cells)}, but the names in line ${headerLine} are ${width}.`,
    { line },
  );
}

function refuseOpenQuote(line: number): never {
  throw new EngineError("unreadable", `A quote that opens in line ${line} is not closed.`, {
    line,
  });
}

function refuseCell(
  bytes: Uint8Array,
  from: number,
  to: number,
  layout: Layout,
  line: number,
  column: number,
): never {
  const text = quoted(cellText(bytes, from, Math.min(to, from + 200), layout));
  const name = quoted(layout.header[column] ?? "");
  throw new EngineError(
    "unreadable",
    `Line ${line} holds ${text} in column ${name}, which is not a number of at most 1e12 in size.`,
    { line },
  );
}
