import { and, asc, desc, eq, isNull, max, sql } from "drizzle-orm";
import type { FitState, Verification } from "#app/domain/fit.ts";
import {
  type ProtocolChoices,
  protocolChoicesSchema,
  type VisitGeometry,
} from "#app/domain/protocol.ts";
import type { RecordingFacts, RecordingMap } from "#app/domain/recording.ts";
import { notFound } from "#app/domain/refusal.ts";
import type { Impedance, Result, ResultPooled, WindowChoice } from "#app/engine/types.ts";
import type { Reader, Transaction } from "./client.server.ts";
import {
  inStudyOrder,
  placeColumns,
  type RecordingPlace,
  type RecordingRow,
  readFacts,
  readMap,
} from "./recordings.server.ts";
import { type ListedReview, listReviews } from "./reviews.server.ts";
import {
  conditions,
  fits,
  fitWindows,
  participants,
  people,
  postures,
  protocols,
  recordings,
  rigs,
  studies,
  visits,
} from "./schema.ts";
import { listStudyAxes } from "./studies.server.ts";

export type FitRow = typeof fits.$inferSelect;
export type FitWindowRow = typeof fitWindows.$inferSelect;

// ---------------------------------------------------------------- rows

export async function findFitRow(db: Reader, labId: string, fitId: string): Promise<FitRow | null> {
  const [row] = await db
    .select()
    .from(fits)
    .where(and(eq(fits.id, fitId), eq(fits.labId, labId)));
  return row ?? null;
}

/** @throws notFound */
export async function getFitRow(db: Reader, labId: string, fitId: string): Promise<FitRow> {
  const row = await findFitRow(db, labId, fitId);
  if (!row) throw notFound();
  return row;
}

export async function findCurrentFitRow(db: Reader, recordingId: string): Promise<FitRow | null> {
  const [row] = await db
    .select()
    .from(fits)
    .where(and(eq(fits.recordingId, recordingId), isNull(fits.supersededAt)));
  return row ?? null;
}

/** Of all labs, the oldest first: what the background work goes through. */
export function listUnverifiedFits(db: Reader): Promise<{ id: string; labId: string }[]> {
  return db
    .select({ id: fits.id, labId: fits.labId })
    .from(fits)
    .where(eq(fits.verification, "unverified"))
    .orderBy(asc(fits.savedAt));
}

export async function nextFitNumber(db: Reader, recordingId: string): Promise<number> {
  const [row] = await db
    .select({ last: max(fits.number) })
    .from(fits)
    .where(eq(fits.recordingId, recordingId));
  return (row?.last ?? 0) + 1;
}

/** A fit with its windows in their order. */
export async function insertFit(
  tx: Transaction,
  row: typeof fits.$inferInsert,
  windows: Omit<typeof fitWindows.$inferInsert, "fitId" | "position">[],
): Promise<void> {
  await tx.insert(fits).values(row);
  const rows = windows.map((window, position) => ({ ...window, fitId: row.id, position }));
  // SQLite takes a limited number of values in one statement.
  for (let start = 0; start < rows.length; start += 500) {
    await tx.insert(fitWindows).values(rows.slice(start, start + 500));
  }
}

export async function supersedeFit(
  tx: Transaction,
  fitId: string,
  by: { fitId: string; at: number },
): Promise<void> {
  await tx
    .update(fits)
    .set({ supersededBy: by.fitId, supersededAt: by.at, version: sql`${fits.version} + 1` })
    .where(eq(fits.id, fitId));
}

/** @returns the new version, or null where the fit is no longer at `version` or no longer current */
export async function updateFitState(
  tx: Transaction,
  fitId: string,
  version: number,
  state: FitState,
): Promise<number | null> {
  const [row] = await tx
    .update(fits)
    .set({ state, version: sql`${fits.version} + 1` })
    .where(and(eq(fits.id, fitId), eq(fits.version, version), isNull(fits.supersededAt)))
    .returning({ version: fits.version });
  return row?.version ?? null;
}

/** The server's mark does not change the fit's version: nobody's form is stale for it. */
export async function updateVerification(
  tx: Transaction,
  fitId: string,
  verification: Verification,
  note: string | null,
): Promise<void> {
  await tx.update(fits).set({ verification, verificationNote: note }).where(eq(fits.id, fitId));
}

// ---------------------------------------------------------------- windows

export interface FitWindow extends WindowChoice {
  origin: "found" | "by_hand";
  editedById: string | null;
  editedByName: string | null;
  editedAt: number | null;
}

export async function listFitWindows(db: Reader, fitId: string): Promise<FitWindow[]> {
  const rows = await db
    .select({ window: fitWindows, editedByName: people.name })
    .from(fitWindows)
    .leftJoin(people, eq(people.id, fitWindows.editedBy))
    .where(eq(fitWindows.fitId, fitId))
    .orderBy(asc(fitWindows.position));
  return rows.map(({ window, editedByName }) => ({
    axis: window.axis,
    onset_s: window.onsetS,
    window_ms: [window.windowStartMs, window.windowEndMs],
    included: window.included,
    reason: window.reason,
    origin: window.origin,
    editedById: window.editedBy,
    editedByName,
    editedAt: window.editedAt,
  }));
}

// ---------------------------------------------------------------- for the screens

export interface FitSummary {
  id: string;
  number: number;
  state: FitState;
  verification: Verification;
  verificationNote: string | null;
  protocolId: string;
  protocolNumber: number;
  engine: string;
  savedById: string;
  savedByName: string;
  savedAt: number;
  /** Null while current. */
  supersededAt: number | null;
  supersededBy: string | null;
  version: number;
}

const summaryColumns = {
  id: fits.id,
  number: fits.number,
  state: fits.state,
  verification: fits.verification,
  verificationNote: fits.verificationNote,
  protocolId: fits.protocolId,
  protocolNumber: protocols.number,
  engine: fits.engine,
  savedById: fits.savedBy,
  savedByName: people.name,
  savedAt: fits.savedAt,
  supersededAt: fits.supersededAt,
  supersededBy: fits.supersededBy,
  version: fits.version,
};

/** A recording's fits, the newest first. */
export function listFits(db: Reader, recordingId: string): Promise<FitSummary[]> {
  return db
    .select(summaryColumns)
    .from(fits)
    .innerJoin(protocols, eq(protocols.id, fits.protocolId))
    .innerJoin(people, eq(people.id, fits.savedBy))
    .where(eq(fits.recordingId, recordingId))
    .orderBy(desc(fits.number));
}

export interface FitContent extends FitSummary {
  windows: FitWindow[];
  result: Result;
  protocolSha256: string;
}

/** A recording's current fit, whole; null where it has none. */
export async function findCurrentFit(db: Reader, recordingId: string): Promise<FitContent | null> {
  const [row] = await db
    .select({ summary: summaryColumns, result: fits.result, protocolSha256: fits.protocolSha256 })
    .from(fits)
    .innerJoin(protocols, eq(protocols.id, fits.protocolId))
    .innerJoin(people, eq(people.id, fits.savedBy))
    .where(and(eq(fits.recordingId, recordingId), isNull(fits.supersededAt)));
  if (!row) return null;
  return {
    ...row.summary,
    protocolSha256: row.protocolSha256,
    result: readResult(row.result),
    windows: await listFitWindows(db, row.summary.id),
  };
}

/** What another person's newer fit shows to someone whose own could not be saved over it. */
export interface FitAtAGlance extends FitSummary {
  windows: FitWindow[];
  pooled: ResultPooled[];
}

export interface StudyAxis {
  name: string;
  label: string;
  positive: string;
  negative: string;
}

export interface ProtocolVersion {
  id: string;
  number: number;
  choices: ProtocolChoices;
  note: string;
  createdAt: number;
}

/** All that stands round a recording: with it a protocol can be compiled and a page be drawn. */
export interface RecordingContext {
  recording: {
    id: string;
    fileName: string;
    sizeBytes: number;
    sha256: string;
    state: RecordingRow["state"];
    refusal: string | null;
    kind: RecordingRow["kind"];
    map: RecordingMap;
    facts: RecordingFacts | null;
    takenInById: string;
    takenInByName: string;
    takenInAt: number;
    version: number;
  };
  study: { id: string; name: string; origin: string | null; version: number };
  participant: { id: string; code: string; testedSide: "left" | "right" };
  condition: {
    id: string;
    name: string;
    level: number | null;
    levelUnit: string | null;
    isBaseline: boolean;
    isActive: boolean;
  };
  posture: { id: string; name: string };
  visit: { id: string; day: string; geometry: VisitGeometry };
  /** The study's, in order; the recording's map says which of them it has. */
  axes: StudyAxis[];
  rig: { id: string; name: string; impedance: Record<string, Impedance> | null };
}

export async function findRecordingContext(
  db: Reader,
  labId: string,
  recordingId: string,
): Promise<RecordingContext | null> {
  const [row] = await db
    .select({
      recording: recordings,
      takenInByName: people.name,
      study: {
        id: studies.id,
        name: studies.name,
        origin: studies.origin,
        version: studies.version,
      },
      participant: {
        id: participants.id,
        code: participants.code,
        testedSide: participants.testedSide,
      },
      condition: {
        id: conditions.id,
        name: conditions.name,
        level: conditions.level,
        levelUnit: conditions.levelUnit,
        isBaseline: conditions.isBaseline,
        isActive: conditions.isActive,
      },
      posture: { id: postures.id, name: postures.name },
      visit: { id: visits.id, day: visits.day, geometry: visits.geometry },
      rig: { id: rigs.id, name: rigs.name, impedance: rigs.impedance },
    })
    .from(recordings)
    .innerJoin(people, eq(people.id, recordings.takenInBy))
    .innerJoin(studies, eq(studies.id, recordings.studyId))
    .innerJoin(participants, eq(participants.id, recordings.participantId))
    .innerJoin(conditions, eq(conditions.id, recordings.conditionId))
    .innerJoin(postures, eq(postures.id, recordings.postureId))
    .innerJoin(visits, eq(visits.id, recordings.visitId))
    .innerJoin(rigs, eq(rigs.id, visits.rigId))
    .where(and(eq(recordings.id, recordingId), eq(recordings.labId, labId)));
  if (!row) return null;
  const axes = await listStudyAxes(db, row.study.id);
  const { recording } = row;
  return {
    recording: {
      id: recording.id,
      fileName: recording.fileName,
      sizeBytes: recording.sizeBytes,
      sha256: recording.sha256,
      state: recording.state,
      refusal: recording.refusal,
      kind: recording.kind,
      map: readMap(recording.channelMap),
      facts: readFacts(recording.facts),
      takenInById: recording.takenInBy,
      takenInByName: row.takenInByName,
      takenInAt: recording.takenInAt,
      version: recording.version,
    },
    study: row.study,
    participant: row.participant,
    condition: row.condition,
    posture: row.posture,
    visit: { ...row.visit, geometry: JSON.parse(row.visit.geometry) as VisitGeometry },
    axes: axes.map(({ name, label, positive, negative }) => ({ name, label, positive, negative })),
    rig: {
      ...row.rig,
      impedance:
        row.rig.impedance === null
          ? null
          : (JSON.parse(row.rig.impedance) as Record<string, Impedance>),
    },
  };
}

export interface RecordingForPerson extends RecordingContext {
  /** The study's versions, the newest first. */
  protocols: ProtocolVersion[];
  current: FitContent | null;
  /** Every fit of the recording, the newest first, the current one too. */
  history: FitSummary[];
}

/** @throws notFound */
export async function getRecordingForPerson(
  db: Reader,
  labId: string,
  recordingId: string,
): Promise<RecordingForPerson> {
  const context = await findRecordingContext(db, labId, recordingId);
  if (!context) throw notFound();
  const [versions, current, history] = await Promise.all([
    db
      .select()
      .from(protocols)
      .where(eq(protocols.studyId, context.study.id))
      .orderBy(desc(protocols.number)),
    findCurrentFit(db, recordingId),
    listFits(db, recordingId),
  ]);
  return {
    ...context,
    protocols: versions.map(({ id, number, choices, note, createdAt }) => ({
      id,
      number,
      choices: readChoices(choices),
      note,
      createdAt,
    })),
    current,
    history,
  };
}

export interface FitForPerson extends RecordingContext {
  fit: FitContent;
  /** PROTOCOL, byte for byte as exported. */
  protocolDocument: string;
  protocolChoices: ProtocolChoices;
  reviews: ListedReview[];
  history: FitSummary[];
}

/** @throws notFound */
export async function getFit(db: Reader, labId: string, fitId: string): Promise<FitForPerson> {
  const [row] = await db
    .select({
      summary: summaryColumns,
      recordingId: fits.recordingId,
      result: fits.result,
      protocolDocument: fits.protocolDocument,
      protocolSha256: fits.protocolSha256,
      choices: protocols.choices,
    })
    .from(fits)
    .innerJoin(protocols, eq(protocols.id, fits.protocolId))
    .innerJoin(people, eq(people.id, fits.savedBy))
    .where(and(eq(fits.id, fitId), eq(fits.labId, labId)));
  if (!row) throw notFound();
  const context = await findRecordingContext(db, labId, row.recordingId);
  if (!context) throw notFound();
  const [windows, reviews, history] = await Promise.all([
    listFitWindows(db, fitId),
    listReviews(db, fitId),
    listFits(db, row.recordingId),
  ]);
  return {
    ...context,
    fit: {
      ...row.summary,
      protocolSha256: row.protocolSha256,
      result: readResult(row.result),
      windows,
    },
    protocolDocument: row.protocolDocument,
    protocolChoices: readChoices(row.choices),
    reviews,
    history,
  };
}

export interface CurrentFit extends RecordingPlace, FitSummary {
  isBaseline: boolean;
  isActive: boolean;
}

/** A study's current fits, in the study's order. */
export async function listCurrentFits(
  db: Reader,
  labId: string,
  studyId: string,
): Promise<CurrentFit[]> {
  const rows = await db
    .select({
      place: placeColumns,
      summary: summaryColumns,
      isBaseline: conditions.isBaseline,
      isActive: conditions.isActive,
    })
    .from(fits)
    .innerJoin(recordings, eq(recordings.id, fits.recordingId))
    .innerJoin(studies, eq(studies.id, recordings.studyId))
    .innerJoin(participants, eq(participants.id, recordings.participantId))
    .innerJoin(conditions, eq(conditions.id, recordings.conditionId))
    .innerJoin(postures, eq(postures.id, recordings.postureId))
    .innerJoin(visits, eq(visits.id, recordings.visitId))
    .innerJoin(protocols, eq(protocols.id, fits.protocolId))
    .innerJoin(people, eq(people.id, fits.savedBy))
    .where(and(eq(fits.labId, labId), eq(recordings.studyId, studyId), isNull(fits.supersededAt)))
    .orderBy(...inStudyOrder);
  return rows.map(({ place, summary, ...rest }) => ({ ...place, ...summary, ...rest }));
}

export interface CurrentResult extends CurrentFit {
  result: Result;
  protocolDocument: string;
}

/** The same with what was computed, for values over several fits. */
export async function listCurrentResults(
  db: Reader,
  labId: string,
  studyId: string,
): Promise<CurrentResult[]> {
  const current = await listCurrentFits(db, labId, studyId);
  const documents = await db
    .select({ id: fits.id, result: fits.result, protocolDocument: fits.protocolDocument })
    .from(fits)
    .innerJoin(recordings, eq(recordings.id, fits.recordingId))
    .where(and(eq(fits.labId, labId), eq(recordings.studyId, studyId), isNull(fits.supersededAt)));
  const byId = new Map(documents.map((document) => [document.id, document]));
  return current.flatMap((fit) => {
    const document = byId.get(fit.id);
    return document === undefined
      ? []
      : [
          {
            ...fit,
            result: readResult(document.result),
            protocolDocument: document.protocolDocument,
          },
        ];
  });
}

/** Stored by `storeFit` after its shape was checked. */
function readResult(text: string): Result {
  return JSON.parse(text) as Result;
}

export function readChoices(text: string): ProtocolChoices {
  return protocolChoicesSchema.parse(JSON.parse(text));
}
