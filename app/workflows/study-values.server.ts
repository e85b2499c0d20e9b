import { type CurrentResult, listCurrentResults } from "#app/db/fits.server.ts";
import { findStudy } from "#app/db/studies.server.ts";
import { leastAdvancedOf } from "#app/domain/cell.ts";
import type { FitState, Verification } from "#app/domain/fit.ts";
import { notFound } from "#app/domain/refusal.ts";
import type { Actor } from "#app/domain/role.ts";
import { windowSpread } from "#app/engine/pool/interval.ts";
import type { Interval, Term, TransientProtocol } from "#app/engine/types.ts";
import type { Desk } from "./desk.server.ts";
import { requireAbility } from "./permission.server.ts";

export interface TermValue {
  /** Mean of the window estimates; the fixed value of a fixed term; null where it was not fitted. */
  mean: number | null;
  /** n − 1 below it; null for fewer than two windows. */
  sd: number | null;
  /** Student's t over windows at the value's `level`. */
  t: Interval | null;
  /** Windows that the mean is over; 0 for a fixed or absent term. */
  windows: number;
}

/** One participant, condition, posture, visit, axis and direction. */
export interface ParticipantValue {
  participantId: string;
  participantCode: string;
  conditionId: string;
  conditionName: string;
  postureId: string;
  postureName: string;
  visitId: string;
  day: string;
  axis: string;
  direction: string;
  K: TermValue;
  B: TermValue;
  I: TermValue;
  /** Included windows of all current fits of the cell. */
  windows: number;
  /** Of the intervals; 0.95 where the protocols of the fits ask for different ones. */
  level: number;
  fits: {
    id: string;
    number: number;
    recordingId: string;
    state: FitState;
    verification: Verification;
    protocolNumber: number;
  }[];
  /** The least advanced of the fits. */
  state: FitState;
  /** Every fit was computed again by the server, with the same numbers. */
  isVerified: boolean;
  /** Ascending; more than one means that different choices are mixed in this value. */
  protocolNumbers: number[];
}

/** Where fits of one value ask for intervals at different levels. */
const LEVEL_OF_MIXED = 0.95;

/**
 * A participant's values: the mean over the included windows of all current fits of a cell, with
 * its interval. Windows of different recordings are taken together; visits stay apart.
 */
export async function participantValues(
  desk: Desk,
  actor: Actor,
  studyId: string,
): Promise<ParticipantValue[]> {
  requireAbility(actor, "read");
  const { db } = desk.store;
  if (!(await findStudy(db, actor.labId, studyId))) throw notFound();
  return valuesOf(await listCurrentResults(db, actor.labId, studyId));
}

type Fit = CurrentResult & { protocol: TransientProtocol };

export function valuesOf(results: readonly CurrentResult[]): ParticipantValue[] {
  const cells = new Map<string, { axis: string; direction: string; fits: Fit[] }>();
  for (const result of results) {
    const fit: Fit = {
      ...result,
      // Stored by the server, which compiled and read it.
      protocol: JSON.parse(result.protocolDocument) as TransientProtocol,
    };
    for (const { axis, direction } of result.result.pooled) {
      const place = [fit.participantId, fit.conditionId, fit.postureId, fit.visitId];
      const key = JSON.stringify([...place, axis, direction]);
      const cell = cells.get(key) ?? { axis, direction, fits: [] };
      cell.fits.push(fit);
      cells.set(key, cell);
    }
  }
  return [...cells.values()].flatMap(({ axis, direction, fits }) => {
    const value = cellValue(axis, direction, fits);
    return value === null ? [] : [value];
  });
}

function cellValue(axis: string, direction: string, fits: readonly Fit[]): ParticipantValue | null {
  const [first] = fits;
  if (!first) return null;
  const levels = new Set(fits.map((fit) => fit.protocol.uncertainty.level));
  const level = levels.size === 1 ? first.protocol.uncertainty.level : LEVEL_OF_MIXED;
  const included = fits.map((fit) => ({
    model: fit.protocol.model,
    windows: fit.result.windows.filter(
      (window) => window.axis === axis && window.direction === direction && window.included,
    ),
  }));
  const term = (name: Term): TermValue => {
    const estimates = included.flatMap(({ model, windows }) =>
      isFree(model, name) ? windows.flatMap((window) => window[name] ?? []) : [],
    );
    const spread = windowSpread(estimates, level);
    return spread
      ? { ...spread, windows: estimates.length }
      : { mean: fixedValue(included, name), sd: null, t: null, windows: 0 };
  };
  return {
    participantId: first.participantId,
    participantCode: first.participantCode,
    conditionId: first.conditionId,
    conditionName: first.conditionName,
    postureId: first.postureId,
    postureName: first.postureName,
    visitId: first.visitId,
    day: first.day,
    axis,
    direction,
    K: term("K"),
    B: term("B"),
    I: term("I"),
    windows: included.reduce((sum, { windows }) => sum + windows.length, 0),
    level,
    fits: fits.map(({ id, number, recordingId, state, verification, protocolNumber }) => ({
      id,
      number,
      recordingId,
      state,
      verification,
      protocolNumber,
    })),
    state: leastAdvancedOf(fits.map((fit) => fit.state)),
    isVerified: fits.every((fit) => fit.verification === "verified"),
    protocolNumbers: [...new Set(fits.map((fit) => fit.protocolNumber))].sort((a, b) => a - b),
  };
}

type Model = TransientProtocol["model"];

function isFree(model: Model, term: Term): boolean {
  return model.terms.includes(term) && model.fixed[term] === undefined;
}

/** The value that every fit fixes a term at, else null. */
function fixedValue(fits: readonly { model: Model }[], term: Term): number | null {
  const values = new Set(fits.map(({ model }) => model.fixed[term] ?? null));
  const [only] = values;
  return values.size === 1 ? (only ?? null) : null;
}
