import type { Clock } from "#app/services/clock.server.ts";

export interface FixedClock extends Clock {
  /** Moves the hands by this many milliseconds. */
  advance(byMs: number): void;
}

/** Stands still at 1 December 2026, 09:00 UTC; ids are "id-1", "id-2" … */
export function fixedClock(startMs = Date.UTC(2026, 11, 1, 9)): FixedClock {
  let now = startMs;
  let ids = 0;
  return {
    now: () => now,
    newId: () => {
      ids += 1;
      return `id-${ids}`;
    },
    advance: (byMs) => {
      now += byMs;
    },
  };
}
