/** A run of this many samples at an extreme is taken for clipping. */
const SHORTEST_RUN = 5;

export interface RawExtremes {
  /** NaN where every sample is missing. */
  rawMin: number;
  rawMax: number;
  /** One value throughout (missing samples aside). */
  constant: boolean;
  /** 1 where a sample lies in a run of at least 5 at `rawMin` or at `rawMax`. */
  clippedRun: Uint8Array;
}

/** Extremes of a column as recorded, and where it stays at one of them. */
export function rawExtremes(raw: Float64Array): RawExtremes {
  let rawMin = Number.NaN;
  let rawMax = Number.NaN;
  for (const value of raw) {
    if (!(value >= rawMin)) rawMin = Number.isNaN(value) ? rawMin : value;
    if (!(value <= rawMax)) rawMax = Number.isNaN(value) ? rawMax : value;
  }
  const clippedRun = new Uint8Array(raw.length);
  let start = 0;
  while (start < raw.length) {
    const value = raw[start] as number;
    let end = start + 1;
    if (value === rawMin || value === rawMax) {
      while (end < raw.length && raw[end] === value) end++;
      if (end - start >= SHORTEST_RUN) clippedRun.fill(1, start, end);
    }
    start = end;
  }
  return { rawMin, rawMax, constant: rawMin === rawMax, clippedRun };
}
