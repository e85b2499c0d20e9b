/**
 * The sample whose stamp is nearest to a time; of two equally near ones the earlier. Stamps do not
 * decrease; missing ones (NaN) are passed over.
 *
 * @returns null where no sample has a stamp
 */
export function nearestSample(timeS: Float64Array, atS: number): number | null {
  // The last stamped sample at or before the time, by halving; NaN looks left for a stamp.
  let low = 0;
  let high = timeS.length - 1;
  let before: number | null = null;
  while (low <= high) {
    const middle = (low + high) >> 1;
    let stamped = middle;
    while (stamped >= low && Number.isNaN(timeS[stamped])) stamped--;
    if (stamped < low) {
      low = middle + 1;
    } else if ((timeS[stamped] as number) <= atS) {
      before = stamped;
      low = middle + 1;
    } else {
      high = stamped - 1;
    }
  }
  let after: number | null = null;
  for (let i = (before ?? -1) + 1; i < timeS.length && after === null; i++) {
    if (!Number.isNaN(timeS[i])) after = i;
  }
  if (before === null || after === null) return before ?? after;
  const [left, right] = [timeS[before] as number, timeS[after] as number];
  return atS - left <= right - atS ? before : after;
}
