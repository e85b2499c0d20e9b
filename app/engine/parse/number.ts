/** The largest magnitude that a cell may hold; beyond it a file is damaged or not a recording. */
export const LARGEST_VALUE = 1e12;

const WITH_POINT = /^[+-]?(?:\d+\.?\d*|\.\d+)(?:[eE][+-]?\d+)?$/;
const WITH_COMMA = /^[+-]?(?:\d+,?\d*|,\d+)(?:[eE][+-]?\d+)?$/;
const MISSING = new Set(["", "nan", "na", "n/a", "null", "-"]);

export function isMissing(text: string): boolean {
  return text.length <= 4 && MISSING.has(text.toLowerCase());
}

/** Whether a trimmed text is a number in plain or exponent form: no 0x10, no inf, no thousands separators. */
export function isNumber(text: string, decimal: "." | ","): boolean {
  return (decimal === "." ? WITH_POINT : WITH_COMMA).test(text);
}

/**
 * The value of a trimmed cell text, NaN for a missing one.
 *
 * @returns null where the text is neither missing nor a number of at most 1e12 in size
 */
export function numberOf(text: string, decimal: "." | ","): number | null {
  if (isMissing(text)) return Number.NaN;
  if (!isNumber(text, decimal)) return null;
  const value = Number(decimal === "." ? text : text.replace(",", "."));
  return Math.abs(value) <= LARGEST_VALUE ? value : null;
}
