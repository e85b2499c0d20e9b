/** What residuals say beside their size. */

export interface Bin {
  low: number;
  high: number;
  count: number;
}

/**
 * Equal bins over ± the largest |value|, an odd number of them, so that zero lies in the middle of
 * one (as many as Sturges' rule asks for, at most 31).
 */
export function binsOf(columns: readonly Float64Array[]): Bin[] {
  let reach = 0;
  let count = 0;
  for (const column of columns) {
    for (const value of column) {
      if (!Number.isFinite(value)) continue;
      count++;
      if (Math.abs(value) > reach) reach = Math.abs(value);
    }
  }
  if (count === 0 || reach === 0) return [];
  const wanted = Math.min(31, Math.ceil(Math.log2(count)) + 1);
  const bins = wanted % 2 === 1 ? wanted : wanted + 1;
  const width = (2 * reach) / bins;
  const made = Array.from({ length: bins }, (_, i) => ({
    low: -reach + i * width,
    high: -reach + (i + 1) * width,
    count: 0,
  }));
  for (const column of columns) {
    for (const value of column) {
      if (!Number.isFinite(value)) continue;
      const bin = made[Math.min(bins - 1, Math.floor((value + reach) / width))] as Bin;
      bin.count++;
    }
  }
  return made;
}

/**
 * Autocorrelation over several windows: Σ rᵢ rᵢ₊ₖ / Σ rᵢ², each window's mean removed, products
 * never taken across windows. Lag 1 of one window is the result's `lag1`.
 *
 * @returns lags 0 to `lags`, shorter where every window is
 */
export function autocorrelation(columns: readonly Float64Array[], lags: number): number[] {
  const centred = columns.map((column) => {
    const mean = column.reduce((sum, value) => sum + value, 0) / column.length;
    return column.map((value) => value - mean);
  });
  let power = 0;
  for (const column of centred) for (const value of column) power += value * value;
  if (power === 0) return [];
  const longest = Math.max(0, ...columns.map((column) => column.length - 1));
  return Array.from({ length: Math.min(lags, longest) + 1 }, (_, k) => {
    let sum = 0;
    for (const column of centred) {
      for (let i = 0; i + k < column.length; i++) {
        sum += (column[i] as number) * (column[i + k] as number);
      }
    }
    return sum / power;
  });
}
