import type { Table } from "#app/engine/types.ts";

/** Physical line (from 1) on which a data row of a table begins. */
export function lineOfRow(
  { firstDataLine, skippedLines }: Pick<Table, "firstDataLine" | "skippedLines">,
  row: number,
): number {
  const unskipped = firstDataLine + row;
  // skippedLines[k] − k never falls, so the lines skipped before the row are found by halving.
  let low = 0;
  let high = skippedLines.length;
  while (low < high) {
    const k = (low + high) >> 1;
    if ((skippedLines[k] as number) - k <= unskipped) low = k + 1;
    else high = k;
  }
  return unskipped + low;
}
