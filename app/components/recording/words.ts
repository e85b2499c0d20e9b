import { formatNumber, formatRange, withUnit } from "#app/domain/quantity.ts";
import { FLAGS, REASONS } from "#app/engine/errors.ts";
import type { Flag } from "#app/engine/types.ts";

/** What to do about a flag; null for one that this version does not know. */
export function todoOf(flag: Flag): string | null {
  return isKey(FLAGS, flag.code) ? FLAGS[flag.code].todo : null;
}

/** Why a window is not in the fit: the engine's code in words, or what a person said. */
export function reasonInWords(reason: string): { text: string; todo: string | null } {
  return isKey(REASONS, reason) ? REASONS[reason] : { text: sentence(reason), todo: null };
}

function isKey<T extends object>(table: T, key: string): key is Extract<keyof T, string> {
  return Object.hasOwn(table, key);
}

function sentence(text: string): string {
  return /[.!?…]$/.test(text) ? text : `${text}.`;
}

/** Milliseconds without digits that are not there: "60", "−2.5". */
export function formatMs(ms: number): string {
  const text = formatNumber(ms, 2);
  return text.includes(".") ? text.replace(/\.?0+$/, "") : text;
}

/** "0–60 ms". */
export function spanInWords([start, end]: readonly [number, number]): string {
  return withUnit(formatRange(formatMs(start), formatMs(end)), "ms");
}

/** VAF in percent: one decimal, as many more as keep a fit short of 100 from being written so. */
export function formatVaf(pct: number | null): string {
  if (pct === null || pct >= 100) return formatNumber(pct, 1);
  let decimals = 1;
  while (decimals < 4 && Number(pct.toFixed(decimals)) >= 100) decimals++;
  return formatNumber(pct, decimals);
}

/**
 * Flags of all windows of an axis together, each once: one that holds for some directions only
 * says for which.
 */
export function axisFlags(
  pooled: readonly { direction: string; flags: readonly Flag[] }[],
): Flag[] {
  const said = new Map<string, { flag: Flag; directions: string[] }>();
  for (const { direction, flags } of pooled) {
    for (const flag of flags) {
      const held = said.get(flag.code + flag.text);
      if (held) held.directions.push(direction);
      else said.set(flag.code + flag.text, { flag, directions: [direction] });
    }
  }
  return [...said.values()].map(({ flag, directions }) =>
    directions.length === pooled.length
      ? flag
      : { code: flag.code, text: `Towards ${directions.join(" and ")}: ${flag.text}` },
  );
}
