import { and, asc, count, eq, inArray, sql } from "drizzle-orm";
import { refusal } from "#app/domain/refusal.ts";
import type { Reader, Transaction } from "./client.server.ts";
import {
  conditions,
  fits,
  participants,
  postures,
  protocols,
  recordings,
  rigs,
  studies,
  studyAxes,
} from "./schema.ts";

export type StudyRow = typeof studies.$inferSelect;
export type StudyAxisRow = typeof studyAxes.$inferSelect;
export type ConditionRow = typeof conditions.$inferSelect;
export type PostureRow = typeof postures.$inferSelect;

/** A study with all that its set-up says, each list in its order. */
export interface StudyPlan extends StudyRow {
  rig: { id: string; name: string } | null;
  axes: StudyAxisRow[];
  conditions: ConditionRow[];
  postures: PostureRow[];
}

export interface StudySummary {
  id: string;
  name: string;
  origin: string | null;
  createdAt: number;
  rigName: string | null;
  participants: number;
  conditions: number;
  protocols: number;
  /** Those whose stored file is verified. */
  recordings: number;
  /** Current fits in each state; recordings without a fit are the rest. */
  fits: { draft: number; submitted: number; returned: number; approved: number };
}

/** A lab's studies, the newest first, with their counts. */
export async function listStudies(db: Reader, labId: string): Promise<StudySummary[]> {
  const rows = await db
    .select({
      id: studies.id,
      name: studies.name,
      origin: studies.origin,
      createdAt: studies.createdAt,
      rigName: rigs.name,
    })
    .from(studies)
    .leftJoin(rigs, eq(rigs.id, studies.rigId))
    .where(eq(studies.labId, labId))
    .orderBy(sql`${studies.createdAt} desc`, asc(studies.name));
  const ids = rows.map((row) => row.id);
  const [people, kinds, versions, files, current] = await Promise.all([
    db
      .select({ studyId: participants.studyId, n: count() })
      .from(participants)
      .where(inArray(participants.studyId, ids))
      .groupBy(participants.studyId),
    db
      .select({ studyId: conditions.studyId, n: count() })
      .from(conditions)
      .where(inArray(conditions.studyId, ids))
      .groupBy(conditions.studyId),
    db
      .select({ studyId: protocols.studyId, n: count() })
      .from(protocols)
      .where(inArray(protocols.studyId, ids))
      .groupBy(protocols.studyId),
    db
      .select({ studyId: recordings.studyId, n: count() })
      .from(recordings)
      .where(and(inArray(recordings.studyId, ids), eq(recordings.state, "ready")))
      .groupBy(recordings.studyId),
    db
      .select({ studyId: recordings.studyId, state: fits.state, n: count() })
      .from(fits)
      .innerJoin(recordings, eq(recordings.id, fits.recordingId))
      .where(and(inArray(recordings.studyId, ids), sql`${fits.supersededAt} is null`))
      .groupBy(recordings.studyId, fits.state),
  ]);
  const of = (counts: { studyId: string; n: number }[], id: string) =>
    counts.find((row) => row.studyId === id)?.n ?? 0;
  return rows.map((row) => {
    const fitsIn = (state: (typeof current)[number]["state"]) =>
      of(
        current.filter((fit) => fit.state === state),
        row.id,
      );
    return {
      ...row,
      participants: of(people, row.id),
      conditions: of(kinds, row.id),
      protocols: of(versions, row.id),
      recordings: of(files, row.id),
      fits: {
        draft: fitsIn("draft"),
        submitted: fitsIn("submitted"),
        returned: fitsIn("returned"),
        approved: fitsIn("approved"),
      },
    };
  });
}

export async function findStudy(
  db: Reader,
  labId: string,
  studyId: string,
): Promise<StudyRow | null> {
  const [row] = await db
    .select()
    .from(studies)
    .where(and(eq(studies.id, studyId), eq(studies.labId, labId)));
  return row ?? null;
}

export async function findStudyByName(
  db: Reader,
  labId: string,
  name: string,
): Promise<StudyRow | null> {
  const [row] = await db
    .select()
    .from(studies)
    .where(and(eq(studies.name, name), eq(studies.labId, labId)));
  return row ?? null;
}

/** The study and its set-up, or null where this lab has no such study. */
export async function findStudyPlan(
  db: Reader,
  labId: string,
  studyId: string,
): Promise<StudyPlan | null> {
  const study = await findStudy(db, labId, studyId);
  if (!study) return null;
  const [rig, axes, conditionRows, postureRows] = await Promise.all([
    study.rigId
      ? db.select({ id: rigs.id, name: rigs.name }).from(rigs).where(eq(rigs.id, study.rigId))
      : [],
    listStudyAxes(db, studyId),
    listConditions(db, studyId),
    listPostures(db, studyId),
  ]);
  return {
    ...study,
    rig: rig[0] ?? null,
    axes,
    conditions: conditionRows,
    postures: postureRows,
  };
}

export function listStudyAxes(db: Reader, studyId: string): Promise<StudyAxisRow[]> {
  return db
    .select()
    .from(studyAxes)
    .where(eq(studyAxes.studyId, studyId))
    .orderBy(asc(studyAxes.position));
}

export function listConditions(db: Reader, studyId: string): Promise<ConditionRow[]> {
  return db
    .select()
    .from(conditions)
    .where(eq(conditions.studyId, studyId))
    .orderBy(asc(conditions.position));
}

export function listPostures(db: Reader, studyId: string): Promise<PostureRow[]> {
  return db
    .select()
    .from(postures)
    .where(eq(postures.studyId, studyId))
    .orderBy(asc(postures.position));
}

/** The study that an object of this lab belongs to, or null: so that a page knows its place. */
export async function findStudyIdOf(
  db: Reader,
  labId: string,
  object: { type: "recording" | "fit"; id: string },
): Promise<string | null> {
  const [row] =
    object.type === "recording"
      ? await db
          .select({ studyId: recordings.studyId })
          .from(recordings)
          .where(and(eq(recordings.id, object.id), eq(recordings.labId, labId)))
      : await db
          .select({ studyId: recordings.studyId })
          .from(fits)
          .innerJoin(recordings, eq(recordings.id, fits.recordingId))
          .where(and(eq(fits.id, object.id), eq(fits.labId, labId)));
  return row?.studyId ?? null;
}

// ---------------------------------------------------------------- writing

export async function insertStudy(
  tx: Transaction,
  row: typeof studies.$inferInsert,
): Promise<void> {
  await tx.insert(studies).values(row);
}

/** Changes the study that was seen at `version`; somebody else's change meanwhile is refused. */
export async function updateStudy(
  tx: Transaction,
  seen: { id: string; version: number },
  change: Partial<Pick<StudyRow, "name" | "rigId" | "fileNamePattern">>,
): Promise<void> {
  const changed = await tx
    .update(studies)
    .set({ ...change, version: sql`${studies.version} + 1` })
    .where(and(eq(studies.id, seen.id), eq(studies.version, seen.version)))
    .returning({ id: studies.id });
  if (changed.length === 0) {
    throw refusal(
      409,
      "This study was changed meanwhile. Load the page again, then make your change.",
    );
  }
}

export async function insertStudyAxes(
  tx: Transaction,
  rows: (typeof studyAxes.$inferInsert)[],
): Promise<void> {
  if (rows.length > 0) await tx.insert(studyAxes).values(rows);
}

export async function insertConditions(
  tx: Transaction,
  rows: (typeof conditions.$inferInsert)[],
): Promise<void> {
  if (rows.length > 0) await tx.insert(conditions).values(rows);
}

export async function insertPostures(
  tx: Transaction,
  rows: (typeof postures.$inferInsert)[],
): Promise<void> {
  if (rows.length > 0) await tx.insert(postures).values(rows);
}
