import type { FitState } from "#app/domain/fit.ts";
import {
  meanOverParticipants,
  type OverParticipants,
} from "#app/engine/compare/over-participants.ts";
import type { Interval, Term } from "#app/engine/types.ts";
import type { ParticipantValue } from "./study-values.server.ts";

/** One participant's value under one condition. SI units. */
export interface ValueCell {
  mean: number;
  /** Over windows; null for fewer than two, or where the term is fixed. */
  t: Interval | null;
  windows: number;
  state: FitState;
  isVerified: boolean;
  recordingIds: string[];
}

export interface ValueRow {
  participantId: string;
  code: string;
  /** As many as conditions, in their order; null where there is no value. */
  cells: (ValueCell | null)[];
}

export interface ValueTable {
  rows: ValueRow[];
  /** For each condition; the participant is the unit. */
  means: OverParticipants[];
  /** Paired with the baseline, over participants with both; null for the baseline and without one. */
  changes: (OverParticipants | null)[];
  /** Of the values shown, how many rest on a fit that is not approved. */
  unapproved: number;
  shown: number;
  /** What is not in the means, and why. */
  leftOut: string[];
  /** Versions that the values shown rest on, ascending. */
  protocolNumbers: number[];
  /** Level of the intervals over windows, where all have the same. */
  level: number | null;
}

export interface WantedValues {
  axis: string;
  direction: string;
  term: Term;
  postureId: string;
  /** Only values whose fits are all approved. */
  approvedOnly: boolean;
}

/**
 * Values of one term, axis, direction and posture as a table of participants × conditions. Where a
 * participant has several visits, the last one stands in the table and the others are named.
 */
export function valueTable(
  values: readonly ParticipantValue[],
  participants: readonly { id: string; code: string }[],
  conditions: readonly { id: string; name: string; isBaseline: boolean }[],
  wanted: WantedValues,
): ValueTable {
  const mine = values.filter(
    (value) =>
      value.axis === wanted.axis &&
      value.direction === wanted.direction &&
      value.postureId === wanted.postureId,
  );
  const missing: string[] = [];
  const notApproved: string[] = [];
  const notDetermined: string[] = [];
  const otherVisits: string[] = [];
  const chosen: ParticipantValue[] = [];

  const rows = participants.map(({ id, code }): ValueRow => {
    const cells = conditions.map((condition): ValueCell | null => {
      const visits = mine
        .filter((value) => value.participantId === id && value.conditionId === condition.id)
        .sort((a, b) => a.day.localeCompare(b.day));
      const name = `${code} ${condition.name}`;
      const last = visits.at(-1);
      if (!last) {
        missing.push(name);
        return null;
      }
      if (visits.length > 1) {
        otherVisits.push(
          `${name} of ${visits
            .slice(0, -1)
            .map((visit) => visit.day)
            .join(", ")}`,
        );
      }
      if (wanted.approvedOnly && last.state !== "approved") {
        notApproved.push(`${name} (${last.state})`);
        return null;
      }
      const term = last[wanted.term];
      if (term.mean === null) {
        notDetermined.push(name);
        return null;
      }
      chosen.push(last);
      return {
        mean: term.mean,
        t: term.t,
        windows: term.windows,
        state: last.state,
        isVerified: last.isVerified,
        recordingIds: last.fits.map((fit) => fit.recordingId),
      };
    });
    return { participantId: id, code, cells };
  });

  const column = (place: number) => rows.map((row) => row.cells[place]?.mean ?? null);
  const baseline = conditions.findIndex((condition) => condition.isBaseline);
  const levels = new Set(chosen.map((value) => value.level));
  const [level = null] = levels;
  return {
    rows,
    means: conditions.map((_, place) => meanOverParticipants(column(place))),
    changes: conditions.map((_, place) => {
      if (baseline === -1 || place === baseline) return null;
      const from = column(baseline);
      const to = column(place);
      return meanOverParticipants(
        to.map((value, row) => {
          const before = from[row] ?? null;
          return value === null || before === null ? null : value - before;
        }),
      );
    }),
    shown: chosen.length,
    unapproved: chosen.filter((value) => value.state !== "approved").length,
    leftOut: [
      ...sentence("No fit yet", shortened(missing, participants, conditions.length)),
      ...sentence("Not approved", notApproved),
      ...sentence(`No window with ${wanted.term}`, notDetermined),
      ...sentence("Earlier visits", otherVisits),
    ],
    protocolNumbers: [...new Set(chosen.flatMap((value) => value.protocolNumbers))].sort(
      (a, b) => a - b,
    ),
    level: levels.size === 1 ? level : null,
  };
}

function sentence(what: string, names: readonly string[]): string[] {
  return names.length === 0 ? [] : [`${what}: ${names.join("; ")}.`];
}

/** A participant who has nothing at all is named once. */
function shortened(
  missing: readonly string[],
  participants: readonly { code: string }[],
  conditions: number,
): string[] {
  return participants.flatMap(({ code }) => {
    const own = missing.filter((name) => name.startsWith(`${code} `));
    return own.length === conditions && conditions > 0 ? [code] : own;
  });
}
