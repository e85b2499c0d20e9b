/** Round numbers on axes, and how they are written. */

const STEPS = [1, 2, 2.5, 5];

export interface TickedRange {
  low: number;
  high: number;
  ticks: number[];
}

/** Multiples of `step` in [low, high], with a little room for rounding. */
function multiples(low: number, high: number, step: number): number[] {
  const first = Math.ceil(low / step - 1e-9);
  const last = Math.floor(high / step + 1e-9);
  const ticks: number[] = [];
  for (let n = first; n <= last; n++) ticks.push(n === 0 ? 0 : Number((n * step).toPrecision(12)));
  return ticks;
}

/** Round steps round a size, ascending. */
function roundSteps(size: number): number[] {
  const decade = Math.floor(Math.log10(size));
  return [-2, -1, 0, 1].flatMap((shift) => STEPS.map((step) => step * 10 ** (decade + shift)));
}

/**
 * Three round ticks for a small axis; the range grows a little where it holds fewer. Zero is among
 * the ticks where it is in range.
 */
export function threeTicks(low: number, high: number): TickedRange {
  if (!(high > low)) {
    const middle = Number.isFinite(low) ? low : 0;
    const reach = Math.abs(middle) > 0 ? Math.abs(middle) / 2 : 1;
    return threeTicks(middle - reach, middle + reach);
  }
  let best: TickedRange | null = null;
  let leastGrowth = Number.POSITIVE_INFINITY;
  for (const step of roundSteps(high - low)) {
    const inside = multiples(low, high, step);
    if (inside.length > 3) continue;
    if (inside.length === 3) return { low, high, ticks: inside };
    const grown = growToThree(low, high, step);
    const growth = grown.high - grown.low - (high - low);
    if (growth < leastGrowth - 1e-12) {
      leastGrowth = growth;
      best = grown;
    }
  }
  return best ?? { low, high, ticks: [low, (low + high) / 2, high] };
}

/** The range that holds three multiples of a step and grows least. */
function growToThree(low: number, high: number, step: number): TickedRange {
  let best: TickedRange | null = null;
  const around = Math.floor(low / step);
  for (let n = around - 2; n <= around + 2; n++) {
    const ticks = [n, n + 1, n + 2].map((m) => (m === 0 ? 0 : Number((m * step).toPrecision(12))));
    const [first, , last] = ticks as [number, number, number];
    const grown = { low: Math.min(low, first), high: Math.max(high, last), ticks };
    const holdsAll = multiples(grown.low, grown.high, step).length === 3;
    if (holdsAll && (best === null || grown.high - grown.low < best.high - best.low)) best = grown;
  }
  return best ?? { low, high, ticks: [] };
}

/** Four to seven round ticks for an axis with room (two or three where `most` says so). */
export function roundTicks(low: number, high: number, most = 7): number[] {
  if (!(high > low)) return [low];
  for (const step of roundSteps(high - low)) {
    const ticks = multiples(low, high, step);
    if (ticks.length <= most) return ticks;
  }
  return [low, high];
}

/** Ticks as written, all with the decimals that the finest of them needs; a true minus; a bare 0. */
export function tickLabels(ticks: readonly number[]): string[] {
  const decimals = Math.max(0, ...ticks.map(decimalsOf));
  return ticks.map((tick) => (tick === 0 ? "0" : tick.toFixed(decimals).replace("-", "−")));
}

function decimalsOf(value: number): number {
  const text = String(Number(value.toPrecision(6)));
  const exponent = /e-(\d+)$/.exec(text);
  if (exponent) return Number(exponent[1]) + (text.split("e")[0]?.split(".")[1]?.length ?? 0);
  return text.split(".")[1]?.length ?? 0;
}

/** Room above and below what is drawn, a share of it. */
const MARGIN = 0.07;

/** Smallest and largest number of some columns with a margin; NaN is passed over. */
export function spread(columns: Iterable<Float64Array>): [number, number] | null {
  let low = Number.POSITIVE_INFINITY;
  let high = Number.NEGATIVE_INFINITY;
  for (const column of columns) {
    for (let i = 0; i < column.length; i++) {
      const value = column[i] as number;
      if (value < low) low = value;
      if (value > high) high = value;
    }
  }
  if (!(high >= low)) return null;
  const margin = (high - low) * MARGIN;
  return [low - margin, high + margin];
}
