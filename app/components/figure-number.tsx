import {
  formatChange,
  formatFull,
  formatNumber,
  halfWidth,
  supportedDecimals,
} from "#app/domain/quantity.ts";
import type { Interval } from "#app/engine/types.ts";

/**
 * One number as it stands on a screen: rounded to what its interval supports, the full value in
 * its title. `decimals` aligns a column; `factor` shows thousandths of SI (see `scaleOf`).
 */
export function FigureNumber({
  value,
  interval = null,
  half: givenHalf,
  showInterval = false,
  decimals: givenDecimals,
  factor = 1,
  unit,
  change = false,
  className = "",
}: {
  value: number | null;
  interval?: Interval | null;
  /** Half-width where there is no pair of bounds (a standard deviation, say). */
  half?: number | null;
  /** "4.64 ± 0.23" instead of "4.64". */
  showInterval?: boolean;
  decimals?: number;
  factor?: number;
  unit?: string;
  /** A change carries its sign. */
  change?: boolean;
  className?: string;
}) {
  const half = givenHalf ?? halfWidth(interval);
  const shown = value === null ? null : value * factor;
  const shownHalf = half === null ? null : half * factor;
  const decimals = givenDecimals ?? supportedDecimals(shown, shownHalf);
  const text = change ? formatChange(shown, decimals) : formatNumber(shown, decimals);
  return (
    <span
      className={`num ${className}`}
      title={fullText(value, interval, half, factor === 1 ? unit : undefined)}
    >
      {text}
      {showInterval && shownHalf !== null && value !== null ? (
        <span> ± {formatNumber(shownHalf, decimals)}</span>
      ) : null}
      {unit ? <span className="text-ink-2"> {unit}</span> : null}
      {value === null ? <span className="sr-only">not determined</span> : null}
    </span>
  );
}

function fullText(
  value: number | null,
  interval: Interval | null,
  half: number | null,
  unit: string | undefined,
): string {
  const parts = [formatFull(value)];
  if (unit) parts[0] += ` ${unit}`;
  if (interval) parts.push(`from ${formatFull(interval[0])} to ${formatFull(interval[1])}`);
  else if (half !== null) parts.push(`± ${formatFull(half)}`);
  return parts.join(", ");
}
