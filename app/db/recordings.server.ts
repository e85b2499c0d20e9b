import { and, asc, eq, inArray, isNull, sql } from "drizzle-orm";
import type { FitState, Verification } from "#app/domain/fit.ts";
import {
  type RecordingFacts,
  type RecordingMap,
  recordingFactsSchema,
  recordingMapSchema,
} from "#app/domain/recording.ts";
import { notFound } from "#app/domain/refusal.ts";
import type { Reader, Transaction } from "./client.server.ts";
import {
  conditions,
  fits,
  participants,
  people,
  postures,
  recordings,
  studies,
  visits,
} from "./schema.ts";

export type RecordingRow = typeof recordings.$inferSelect;
export type RecordingState = RecordingRow["state"];

export async function findRecording(
  db: Reader,
  labId: string,
  recordingId: string,
): Promise<RecordingRow | null> {
  const [row] = await db
    .select()
    .from(recordings)
    .where(and(eq(recordings.id, recordingId), eq(recordings.labId, labId)));
  return row ?? null;
}

/** @throws notFound */
export async function getRecording(
  db: Reader,
  labId: string,
  recordingId: string,
): Promise<RecordingRow> {
  const row = await findRecording(db, labId, recordingId);
  if (!row) throw notFound();
  return row;
}

/** The lab's recording of these very bytes, whatever its state. */
export async function findRecordingByHash(
  db: Reader,
  labId: string,
  sha256: string,
): Promise<RecordingRow | null> {
  const [row] = await db
    .select()
    .from(recordings)
    .where(and(eq(recordings.labId, labId), eq(recordings.sha256, sha256)));
  return row ?? null;
}

export async function insertRecording(
  tx: Transaction,
  row: typeof recordings.$inferInsert,
): Promise<void> {
  await tx.insert(recordings).values(row);
}

/** Gives a refused row another try: the same bytes, mapped or placed anew. */
export async function retryRecording(
  tx: Transaction,
  recordingId: string,
  values: Omit<typeof recordings.$inferInsert, "id">,
): Promise<void> {
  await tx
    .update(recordings)
    .set({ ...values, refusal: null, facts: null, version: sql`${recordings.version} + 1` })
    .where(and(eq(recordings.id, recordingId), eq(recordings.state, "refused")));
}

/** @returns false where the row is no longer being verified */
export async function endVerification(
  tx: Transaction,
  recordingId: string,
  outcome: { state: "ready"; facts: string } | { state: "refused"; refusal: string },
): Promise<boolean> {
  const changed = await tx
    .update(recordings)
    .set({ ...outcome, version: sql`${recordings.version} + 1` })
    .where(and(eq(recordings.id, recordingId), eq(recordings.state, "verifying")))
    .returning({ id: recordings.id });
  return changed.length > 0;
}

/** Of all labs: what the background work goes through. */
export function listVerifyingRecordings(db: Reader): Promise<RecordingRow[]> {
  return db
    .select()
    .from(recordings)
    .where(eq(recordings.state, "verifying"))
    .orderBy(asc(recordings.takenInAt));
}

/** The visit of this participant on this rig on this day; made where there is none. */
export async function ensureVisit(
  tx: Transaction,
  visit: { participantId: string; rigId: string; day: string },
  made: { id: string; createdAt: number },
): Promise<typeof visits.$inferSelect> {
  const [found] = await tx
    .select()
    .from(visits)
    .where(
      and(
        eq(visits.participantId, visit.participantId),
        eq(visits.rigId, visit.rigId),
        eq(visits.day, visit.day),
      ),
    );
  if (found) return found;
  const [inserted] = await tx
    .insert(visits)
    .values({ ...visit, ...made })
    .returning();
  if (!inserted) throw new Error("The visit was not stored.");
  return inserted;
}

/** Where a recording stands in its study, in names. */
export interface RecordingPlace {
  recordingId: string;
  fileName: string;
  studyId: string;
  studyName: string;
  participantId: string;
  participantCode: string;
  conditionId: string;
  conditionName: string;
  postureId: string;
  postureName: string;
  visitId: string;
  day: string;
}

export const placeColumns = {
  recordingId: recordings.id,
  fileName: recordings.fileName,
  studyId: recordings.studyId,
  studyName: studies.name,
  participantId: recordings.participantId,
  participantCode: participants.code,
  conditionId: recordings.conditionId,
  conditionName: conditions.name,
  postureId: recordings.postureId,
  postureName: postures.name,
  visitId: recordings.visitId,
  day: visits.day,
};

export async function findRecordingPlace(
  db: Reader,
  labId: string,
  recordingId: string,
): Promise<RecordingPlace | null> {
  const [place] = await listRecordingPlaces(db, labId, [recordingId]);
  return place ?? null;
}

/** Those of these recordings that are the lab's, in no order. */
export function listRecordingPlaces(
  db: Reader,
  labId: string,
  recordingIds: readonly string[],
): Promise<RecordingPlace[]> {
  return db
    .select(placeColumns)
    .from(recordings)
    .innerJoin(studies, eq(studies.id, recordings.studyId))
    .innerJoin(participants, eq(participants.id, recordings.participantId))
    .innerJoin(conditions, eq(conditions.id, recordings.conditionId))
    .innerJoin(postures, eq(postures.id, recordings.postureId))
    .innerJoin(visits, eq(visits.id, recordings.visitId))
    .where(and(eq(recordings.labId, labId), inArray(recordings.id, [...recordingIds])));
}

/** By participant, condition, posture and day, as a study lists its recordings. */
export const inStudyOrder = [
  asc(participants.code),
  asc(conditions.position),
  asc(postures.position),
  asc(visits.day),
  asc(recordings.takenInAt),
  asc(recordings.fileName),
];

export interface ListedRecording extends RecordingPlace {
  state: RecordingState;
  refusal: string | null;
  sizeBytes: number;
  sha256: string;
  takenInById: string;
  takenInByName: string;
  takenInAt: number;
  axes: string[];
  facts: RecordingFacts | null;
  fit: { id: string; number: number; state: FitState; verification: Verification } | null;
}

/** A study's recordings by participant, condition, posture and day, each with its current fit. */
export async function listRecordings(
  db: Reader,
  labId: string,
  studyId: string,
): Promise<ListedRecording[]> {
  const rows = await db
    .select({
      place: placeColumns,
      state: recordings.state,
      refusal: recordings.refusal,
      sizeBytes: recordings.sizeBytes,
      sha256: recordings.sha256,
      takenInById: recordings.takenInBy,
      takenInByName: people.name,
      takenInAt: recordings.takenInAt,
      channelMap: recordings.channelMap,
      facts: recordings.facts,
      fit: {
        id: fits.id,
        number: fits.number,
        state: fits.state,
        verification: fits.verification,
      },
    })
    .from(recordings)
    .innerJoin(studies, eq(studies.id, recordings.studyId))
    .innerJoin(participants, eq(participants.id, recordings.participantId))
    .innerJoin(conditions, eq(conditions.id, recordings.conditionId))
    .innerJoin(postures, eq(postures.id, recordings.postureId))
    .innerJoin(visits, eq(visits.id, recordings.visitId))
    .innerJoin(people, eq(people.id, recordings.takenInBy))
    .leftJoin(fits, and(eq(fits.recordingId, recordings.id), isNull(fits.supersededAt)))
    .where(and(eq(recordings.labId, labId), eq(recordings.studyId, studyId)))
    .orderBy(...inStudyOrder);
  return rows.map(({ place, channelMap, facts, ...rest }) => ({
    ...place,
    ...rest,
    axes: readMap(channelMap).axes.map((axis) => axis.name),
    facts: readFacts(facts),
  }));
}

export function readMap(text: string): RecordingMap {
  return recordingMapSchema.parse(JSON.parse(text));
}

export function readFacts(text: string | null): RecordingFacts | null {
  return text === null ? null : recordingFactsSchema.parse(JSON.parse(text));
}
