import { EngineError, flag, quoted } from "#app/engine/errors.ts";
import { decode } from "#app/engine/parse/decode.ts";
import { findLayout, HEAD_BYTES, type Layout } from "#app/engine/parse/layout.ts";
import { scanRows } from "#app/engine/parse/scan-rows.ts";
import type { Table, TableProtocol } from "#app/engine/types.ts";

/**
 * Reads the named columns of a recording.
 *
 * The head tells the layout; then the bytes are gone over once, and the reading stops at the first
 * thing that is wrong.
 *
 * @param columns  names to read, as in the header but for blanks around them
 * @throws EngineError "unreadable", with the line where one is to blame
 */
export function readTable(
  file: Uint8Array,
  table: TableProtocol,
  columns: readonly string[],
): Table {
  const decoded = decode(file);
  const names = [...new Set(columns.map((name) => name.trim()))];
  const layout = findLayout(decoded, table, decoded.bytes.length > HEAD_BYTES, names);
  const slots = slotsOf(layout, names);
  const scan = scanRows(decoded.bytes, layout, slots, names.length);
  if (scan.rows === 0) {
    throw new EngineError(
      "unreadable",
      `No rows stand below the names in line ${layout.dialect.headerLine}.`,
    );
  }
  return {
    dialect: layout.dialect,
    header: layout.header,
    units: layout.units,
    rows: scan.rows,
    columns: new Map(names.map((name, i) => [name, scan.columns[i] as Float64Array])),
    firstDataLine: scan.firstDataLine,
    skippedLines: scan.skippedLines,
    flags: scan.truncated ? [...decoded.flags, flag("truncated")] : decoded.flags,
  };
}

/** A first part that holds whatever tells a file's layout: 256 KiB, or three lines of the longest kind. */
export const FIRST_PART_BYTES = 4 * 1024 * 1024;

/**
 * Whether a large file's first part can be that of a recording: what is plainly none (a film, an
 * archive, a disk's worth of zeros, a table of something else) need not be read to its end.
 *
 * @param part  the first `FIRST_PART_BYTES`
 * @throws EngineError as {@link readTable}
 */
export function checkFirstPart(
  part: Uint8Array,
  table: TableProtocol,
  columns: readonly string[],
): void {
  const decoded = decode(part, true);
  // Names in a stated line may stand behind the first part.
  if (table.header_row !== "auto") return;
  const names = [...new Set(columns.map((name) => name.trim()))];
  slotsOf(findLayout(decoded, table, true, names), names);
}

/** For each column of the file its place among `names`, or −1. */
function slotsOf(layout: Layout, names: readonly string[]): Int32Array {
  const { header, dialect } = layout;
  const slots = new Int32Array(header.length).fill(-1);
  names.forEach((name, slot) => {
    const at = header.indexOf(name);
    if (at < 0) {
      const shown = header.slice(0, 12).map(quoted).join(", ");
      throw new EngineError(
        "unreadable",
        `The column ${quoted(name)} is missing; line ${dialect.headerLine} names ${shown}${header.length > 12 ? " and more" : ""}.`,
        { line: dialect.headerLine },
      );
    }
    if (header.includes(name, at + 1)) {
      throw new EngineError(
        "unreadable",
        `Two columns are called ${quoted(name)} in line ${dialect.headerLine}; give each mapped column a name of its own.`,
        { line: dialect.headerLine },
      );
    }
    slots[at] = slot;
  });
  return slots;
}
