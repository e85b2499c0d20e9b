import { EngineError } from "#app/engine/errors.ts";

/** A line may be at most this long, in bytes. */
export const LONGEST_LINE = 1024 * 1024;
/** A line may have at most this many cells. */
export const MOST_COLUMNS = 4096;

const LF = 0x0a;
const CR = 0x0d;

/** Offset behind the line end (LF, CR LF or CR) at `at`. */
export function afterLineEnd(bytes: Uint8Array, at: number): number {
  return bytes[at] === CR && bytes[at + 1] === LF ? at + 2 : at + 1;
}

/** Offset of the first LF or CR at or after `from`; the length where there is none. */
export function lineEndFrom(bytes: Uint8Array, from: number): number {
  let at = from;
  while (at < bytes.length && bytes[at] !== LF && bytes[at] !== CR) at++;
  return at;
}

/**
 * Goes over whole lines from `from` on.
 *
 * @param firstLine  physical line at `from`
 * @param goOn  asked before each line; false ends the walk
 * @returns where the walk ended: the start of a line, or the length, and that line's number
 * @throws EngineError "unreadable" for a line over 1 MiB
 */
export function walkLines(
  bytes: Uint8Array,
  from: number,
  firstLine: number,
  goOn: (line: number, offset: number) => boolean,
): { offset: number; line: number } {
  let offset = from;
  let line = firstLine;
  while (offset < bytes.length && goOn(line, offset)) {
    const end = lineEndFrom(bytes, offset);
    if (end - offset > LONGEST_LINE) refuseLongLine(line);
    offset = end < bytes.length ? afterLineEnd(bytes, end) : end;
    line++;
  }
  return { offset, line };
}

export function refuseLongLine(line: number): never {
  throw new EngineError(
    "unreadable",
    `Line ${line} is longer than 1 MiB, so the file is not a table of recorded samples.`,
    { line },
  );
}

export function cellCount(cells: number): string {
  return cells === 1 ? "1 cell" : `${cells} cells`;
}
