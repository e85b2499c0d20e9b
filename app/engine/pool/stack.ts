import type { WindowColumns } from "#app/engine/types.ts";

/** A window's columns and where they begin, in samples after the onset. */
export interface PlacedColumns {
  first: number;
  columns: WindowColumns;
}

const KEYS = ["angleRad", "velocityRadPerS", "accelerationRadPerS2", "torqueNm"] as const;

/** The windows' rows below each other: what the pooled estimate is fitted to. */
export function stackColumns(windows: readonly WindowColumns[]): WindowColumns {
  const rows = windows.reduce((sum, { torqueNm }) => sum + torqueNm.length, 0);
  const stack = emptyColumns(rows);
  let at = 0;
  for (const columns of windows) {
    for (const key of KEYS) stack[key].set(columns[key], at);
    at += columns.torqueNm.length;
  }
  return stack;
}

/**
 * The mean trace over the samples, by index from the onset, that all windows have.
 *
 * @returns null where they have none in common
 */
export function meanTrace(windows: readonly PlacedColumns[]): PlacedColumns | null {
  if (windows.length === 0) return null;
  let first = Number.NEGATIVE_INFINITY;
  let last = Number.POSITIVE_INFINITY;
  for (const window of windows) {
    first = Math.max(first, window.first);
    last = Math.min(last, window.first + window.columns.torqueNm.length - 1);
  }
  if (last < first) return null;
  const columns = emptyColumns(last - first + 1);
  for (const window of windows) {
    for (const key of KEYS) {
      const from = window.columns[key];
      const sum = columns[key];
      for (let i = 0; i < sum.length; i++) {
        sum[i] = (sum[i] as number) + (from[i + first - window.first] as number);
      }
    }
  }
  for (const key of KEYS) {
    const sum = columns[key];
    for (let i = 0; i < sum.length; i++) sum[i] = (sum[i] as number) / windows.length;
  }
  return { first, columns };
}

function emptyColumns(rows: number): WindowColumns {
  return {
    angleRad: new Float64Array(rows),
    velocityRadPerS: new Float64Array(rows),
    accelerationRadPerS2: new Float64Array(rows),
    torqueNm: new Float64Array(rows),
  };
}
