import { mean, sampleSd } from "#app/engine/math/moments.ts";
import { median } from "#app/engine/math/quantile.ts";

const QUIET_MS = 500;
/** A level needs this share of the quiet stretch. */
const QUIET_SHARE = 0.5;
const BURST_SDS = 5;
const BURST_MS = 10;
const LATENCY_REACH_MS = 200;
/** A level over this many times the median of the windows that are kept is raised. */
const RAISED = 2;

export interface QuietLevel {
  mean: number;
  sd: number;
}

export interface EmgTiming {
  baseline: number | null;
  burst: boolean;
  latencyMs: number | null;
}

/**
 * Mean and SD of the moving level over the 500 ms before the onset.
 *
 * @param level  of {@link movingLevel}; NaN where there is none
 * @returns null where less than half of the stretch has a level
 */
export function quietLevel(level: Float64Array, onset: number, rateHz: number): QuietLevel | null {
  const wanted = Math.round((QUIET_MS * rateHz) / 1000);
  const values: number[] = [];
  for (let i = Math.max(0, onset - wanted); i < Math.min(onset, level.length); i++) {
    const value = level[i] as number;
    if (!Number.isNaN(value)) values.push(value);
  }
  if (values.length < Math.max(2, QUIET_SHARE * wanted)) return null;
  return { mean: mean(values), sd: sampleSd(values) };
}

/**
 * When a muscle answers. A burst stays over mean + 5 SD of the quiet level for ≥ 10 ms; its latency
 * is that of the first one that begins at or after the onset, within 200 ms and before the next
 * onset. `burst` says whether 10 ms of one lie inside the window.
 *
 * @param window  closed range of samples
 */
export function emgTiming(
  level: Float64Array,
  quiet: QuietLevel | null,
  onset: number,
  nextOnset: number | null,
  window: readonly [number, number],
  rateHz: number,
): EmgTiming {
  if (quiet === null) return { baseline: null, burst: false, latencyMs: null };
  const limit = quiet.mean + BURST_SDS * quiet.sd;
  const least = Math.max(1, Math.ceil((BURST_MS * rateHz) / 1000 - 1e-6));
  const reach = onset + Math.round((LATENCY_REACH_MS * rateHz) / 1000);
  const last = nextOnset === null ? reach : Math.min(reach, nextOnset - 1);
  const first = firstBurst(level, limit, least, onset, last);
  return {
    baseline: quiet.mean,
    burst: hasRun(level, limit, least, window),
    latencyMs: first === null ? null : ((first - onset) * 1000) / rateHz,
  };
}

/** The level over which one before an onset is raised: twice the median of the included windows'; ∞ for none. */
export function raisedLimit(kept: readonly number[]): number {
  return kept.length === 0 ? Number.POSITIVE_INFINITY : RAISED * median(kept);
}

/** First sample in [from, last] at which a run of at least `least` samples over the limit begins. */
function firstBurst(
  level: Float64Array,
  limit: number,
  least: number,
  from: number,
  last: number,
): number | null {
  let i = from;
  // A burst that was there before the onset is no answer to it.
  if (from > 0 && (level[from - 1] as number) > limit) while ((level[i] as number) > limit) i++;
  for (; i <= last; i++) {
    let end = i;
    while (end - i < least && (level[end] as number) > limit) end++;
    if (end - i >= least) return i;
    i = end;
  }
  return null;
}

function hasRun(
  level: Float64Array,
  limit: number,
  least: number,
  [from, to]: readonly [number, number],
): boolean {
  let run = 0;
  for (let i = Math.max(0, from); i <= to && i < level.length; i++) {
    run = (level[i] as number) > limit ? run + 1 : 0;
    if (run >= least) return true;
  }
  return false;
}
