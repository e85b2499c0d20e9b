import type { Interval, Term } from "#app/engine/types.ts";

/** How quantities are named and written; the same on every screen, in figures and in exports' words. */

export const TERM_NAMES: Record<Term, string> = { K: "stiffness", B: "damping", I: "inertia" };

/** As written on a screen; SI. */
export const TERM_UNITS: Record<Term, string> = { K: "N·m/rad", B: "N·m·s/rad", I: "kg·m²" };

const TRUE_MINUS = "−";
export const THIN_SPACE = " ";
/** Stands where there is no number; never 0. */
export const NO_NUMBER = "–";

/** A column of values in one unit: shown = SI · factor. */
export interface Scale {
  factor: number;
  unit: string;
}

/**
 * SI, or 10⁻³ of it where every value is below 0.3: so that 0.00315 kg·m² and 0.00032 kg·m² stand as
 * 3.15 and 0.32 in one column.
 */
export function scaleOf(term: Term, values: readonly (number | null)[]): Scale {
  const unit = TERM_UNITS[term];
  const largest = values.reduce<number>((most, v) => Math.max(most, Math.abs(v ?? 0)), 0);
  return largest > 0 && largest < 0.3
    ? { factor: 1000, unit: `10⁻³${THIN_SPACE}${unit}` }
    : { factor: 1, unit };
}

/** Decimals that show `value` with so many significant digits; never below 0, never above 12. */
function decimalsForDigits(value: number, digits: number): number {
  const rounded = Math.abs(Number(value.toPrecision(digits)));
  if (!(rounded > 0) || !Number.isFinite(rounded)) return 0;
  return Math.min(12, Math.max(0, digits - 1 - Math.floor(Math.log10(rounded))));
}

/** Half the width of an interval; null where a bound is not a number. */
export function halfWidth(interval: Interval | null): number | null {
  if (!interval) return null;
  const half = (interval[1] - interval[0]) / 2;
  return Number.isFinite(half) && half >= 0 ? half : null;
}

/**
 * Decimals that an interval supports: its half-width is shown with two significant digits, its
 * value to the same place. Without an interval, three significant digits of the value.
 */
export function supportedDecimals(value: number | null, half: number | null): number {
  if (half !== null && half > 0) return decimalsForDigits(half, 2);
  return value === null ? 0 : decimalsForDigits(value, 3);
}

/** Decimals for a column: the most that any of its rows supports, at most one more than the fewest. */
export function columnDecimals(
  rows: readonly { value: number | null; half: number | null }[],
): number {
  const each = rows
    .filter((row) => row.value !== null)
    .map((row) => supportedDecimals(row.value, row.half));
  if (each.length === 0) return 0;
  return Math.min(Math.max(...each), Math.min(...each) + 1);
}

/** 1234.5 → "1234.50", −0.0001 with two decimals → "0.00", null → "–". */
export function formatNumber(value: number | null | undefined, decimals: number): string {
  if (value === null || value === undefined || !Number.isFinite(value)) return NO_NUMBER;
  const text = Math.abs(value).toFixed(decimals);
  const isZero = Number(text) === 0;
  return value < 0 && !isZero ? `${TRUE_MINUS}${text}` : text;
}

/** As `formatNumber`, a change with its sign ("+0.22"). */
export function formatChange(value: number | null | undefined, decimals: number): string {
  const text = formatNumber(value, decimals);
  const grows = value !== null && value !== undefined && value > 0 && Number(text) > 0;
  return grows ? `+${text}` : text;
}

/** So many significant digits without an exponent: 0.0044, 2.4, 61. */
export function formatDigits(value: number | null | undefined, digits: number): string {
  if (value === null || value === undefined || !Number.isFinite(value)) return NO_NUMBER;
  return formatNumber(value, decimalsForDigits(value, digits));
}

/** Number and unit with a thin space between: "4.64 N·m/rad". */
export function withUnit(text: string, unit: string): string {
  return `${text}${THIN_SPACE}${unit}`;
}

/** A span with an en dash: "25–100". */
export function formatRange(low: string, high: string): string {
  return `${low}–${high}`;
}

/** Every digit that the value has, for a title and for copying; true minus. */
export function formatFull(value: number | null | undefined): string {
  if (value === null || value === undefined || !Number.isFinite(value)) return "not determined";
  return String(value).replaceAll("-", TRUE_MINUS);
}

/** Bytes as a person says them: "12.4 MB". */
export function formatBytes(bytes: number): string {
  const units = ["B", "kB", "MB", "GB", "TB"];
  let shown = bytes;
  let step = 0;
  while (shown >= 1000 && step < units.length - 1) {
    shown /= 1000;
    step += 1;
  }
  return withUnit(step === 0 ? String(shown) : formatDigits(shown, 3), units[step] ?? "B");
}

const MONTHS = "Jan Feb Mar Apr May Jun Jul Aug Sep Oct Nov Dec".split(" ");

/** "14 Oct 2026", in UTC like every stored time. */
export function formatDay(at: number): string {
  const date = new Date(at);
  return `${date.getUTCDate()} ${MONTHS[date.getUTCMonth()]} ${date.getUTCFullYear()}`;
}

/** "09:05 UTC". */
export function formatTime(at: number): string {
  return `${new Date(at).toISOString().slice(11, 16)} UTC`;
}

/** "14 Oct 2026, 09:05 UTC". */
export function formatMoment(at: number): string {
  return `${formatDay(at)}, ${formatTime(at)}`;
}

/** "1 window", "6 windows". */
export function countOf(count: number, one: string, many = `${one}s`): string {
  return `${count} ${count === 1 ? one : many}`;
}
