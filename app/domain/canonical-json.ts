/**
 * One text for one value: keys sorted by code unit, no white space, so that equal values have equal
 * bytes and equal hashes. Keys whose value is undefined are left out, as JSON.stringify does.
 *
 * @throws RangeError for what JSON has no word for: NaN, infinities, functions, undefined in a list
 */
export function canonicalJson(value: unknown): string {
  if (value === null || typeof value === "boolean" || typeof value === "string") {
    return JSON.stringify(value);
  }
  if (typeof value === "number") {
    if (!Number.isFinite(value)) throw new RangeError(`JSON has no word for ${value}`);
    return JSON.stringify(value);
  }
  if (Array.isArray(value)) return `[${value.map(canonicalJson).join(",")}]`;
  if (typeof value === "object") {
    const entries = Object.entries(value).filter(([, entry]) => entry !== undefined);
    entries.sort(([a], [b]) => (a < b ? -1 : 1));
    return `{${entries.map(([key, entry]) => `${JSON.stringify(key)}:${canonicalJson(entry)}`).join(",")}}`;
  }
  throw new RangeError(`JSON has no word for ${typeof value}`);
}
