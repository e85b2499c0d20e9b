/**
 * Columns that share a time axis, thinned for drawing: the smallest and the largest value of each
 * column in each stretch of time, in the order in which they come, so that no peak is lost.
 */
export interface ThinnedColumns {
  timeS: Float64Array;
  /** As many as were given, each as long as `timeS`; NaN where a line has to break. */
  columns: Float64Array[];
  /** False where every sample of the range is there. */
  thinned: boolean;
}

/** Above this many samples per pixel a column is thinned. */
const SAMPLES_PER_PIXEL = 4;

/**
 * Samples [from, to) of some columns, thinned to two points per pixel where there are more than four.
 *
 * @param timeS  s, never falling
 * @param columns  each as long as `timeS`
 * @param breaks  samples before which a line has to break (gaps), ascending
 */
export function thinColumns(
  timeS: Float64Array,
  columns: readonly Float64Array[],
  range: { from: number; to: number; pixels: number },
  breaks: readonly number[] = [],
): ThinnedColumns {
  const from = Math.max(0, range.from);
  const to = Math.min(timeS.length, range.to);
  const samples = Math.max(0, to - from);
  const pixels = Math.max(1, Math.floor(range.pixels));
  if (samples <= SAMPLES_PER_PIXEL * pixels) return everySample(timeS, columns, from, to, breaks);

  const thinnedTimeS = new Float64Array(2 * pixels);
  const thinned = columns.map(() => new Float64Array(2 * pixels));
  const firstS = timeS[from] as number;
  const spanS = (timeS[to - 1] as number) - firstS;
  let index = from;
  for (let pixel = 0; pixel < pixels; pixel++) {
    const startS = firstS + (spanS * pixel) / pixels;
    const endS = firstS + (spanS * (pixel + 1)) / pixels;
    const start = index;
    while (index < to && ((timeS[index] as number) < endS || pixel === pixels - 1)) index++;
    thinnedTimeS[2 * pixel] = startS;
    thinnedTimeS[2 * pixel + 1] = (startS + endS) / 2;
    for (let c = 0; c < columns.length; c++) {
      const [first, second] = extremes(columns[c] as Float64Array, start, index);
      const column = thinned[c] as Float64Array;
      column[2 * pixel] = first;
      column[2 * pixel + 1] = second;
    }
  }
  return { timeS: thinnedTimeS, columns: thinned, thinned: true };
}

/** Smallest and largest of column[from, to), in the order in which they come; NaN where there is none. */
function extremes(column: Float64Array, from: number, to: number): [number, number] {
  let smallest = Number.NaN;
  let largest = Number.NaN;
  let smallestAt = from;
  let largestAt = from;
  for (let i = from; i < to; i++) {
    const value = column[i] as number;
    if (Number.isNaN(value)) continue;
    // Written so that the first number takes the place of NaN.
    if (!(value >= smallest)) {
      smallest = value;
      smallestAt = i;
    }
    if (!(value <= largest)) {
      largest = value;
      largestAt = i;
    }
  }
  return smallestAt <= largestAt ? [smallest, largest] : [largest, smallest];
}

function everySample(
  timeS: Float64Array,
  columns: readonly Float64Array[],
  from: number,
  to: number,
  breaks: readonly number[],
): ThinnedColumns {
  const inside = breaks.filter((at) => at > from && at < to);
  if (inside.length === 0) {
    return {
      timeS: timeS.slice(from, to),
      columns: columns.map((column) => column.slice(from, to)),
      thinned: false,
    };
  }
  // A sample without a value stands in each gap, half-way, to break the lines there.
  const length = to - from + inside.length;
  const out: ThinnedColumns = {
    timeS: new Float64Array(length),
    columns: columns.map(() => new Float64Array(length)),
    thinned: false,
  };
  let write = 0;
  let next = 0;
  for (let i = from; i < to; i++) {
    if (i === inside[next]) {
      next++;
      out.timeS[write] = ((timeS[i - 1] as number) + (timeS[i] as number)) / 2;
      for (const column of out.columns) column[write] = Number.NaN;
      write++;
    }
    out.timeS[write] = timeS[i] as number;
    for (let c = 0; c < columns.length; c++) {
      (out.columns[c] as Float64Array)[write] = (columns[c] as Float64Array)[i] as number;
    }
    write++;
  }
  return out;
}

/** The first index whose time is not before `atS`; `timeS.length` where all are. */
export function firstAtOrAfter(timeS: Float64Array, atS: number): number {
  let low = 0;
  let high = timeS.length;
  while (low < high) {
    const middle = (low + high) >>> 1;
    if ((timeS[middle] as number) < atS) low = middle + 1;
    else high = middle;
  }
  return low;
}

/** The sample whose stamp is nearest; the earlier of two that are as near. */
export function nearestSample(timeS: Float64Array, atS: number): number {
  const after = firstAtOrAfter(timeS, atS);
  if (after === 0) return 0;
  if (after === timeS.length) return timeS.length - 1;
  const before = after - 1;
  return atS - (timeS[before] as number) <= (timeS[after] as number) - atS ? before : after;
}

/** Stamps with each missing one put evenly between its neighbours, so that time can be searched. */
export function withoutMissingStamps(timeS: Float64Array, rateHz: number): Float64Array {
  if (!timeS.some(Number.isNaN)) return timeS;
  const filled = timeS.slice();
  const first = filled.findIndex((stamp) => !Number.isNaN(stamp));
  for (let i = first - 1; i >= 0; i--) filled[i] = (filled[i + 1] as number) - 1 / rateHz;
  for (let i = Math.max(1, first); i < filled.length; i++) {
    if (!Number.isNaN(filled[i])) continue;
    let next = i + 1;
    while (next < filled.length && Number.isNaN(filled[next])) next++;
    const start = filled[i - 1] as number;
    const step =
      next < filled.length ? ((filled[next] as number) - start) / (next - i + 1) : 1 / rateHz;
    for (; i < next; i++) filled[i] = (filled[i - 1] as number) + step;
  }
  return filled;
}
