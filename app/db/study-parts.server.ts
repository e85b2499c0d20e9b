import { and, eq, max, ne } from "drizzle-orm";
import type { Reader, Transaction } from "./client.server.ts";
import { readMap } from "./recordings.server.ts";
import {
  conditions,
  participants,
  postures,
  recordings,
  studies,
  studyAxes,
  visits,
} from "./schema.ts";

/** The lists that a study is made of; each belongs to a study, and the study to a lab. */

export type StudyPart = "axis" | "condition" | "posture" | "participant";

const TABLES = {
  axis: studyAxes,
  condition: conditions,
  posture: postures,
  participant: participants,
} as const;

/** The study of a part, or null where this lab has no such part. */
export async function findStudyOfPart(
  db: Reader,
  labId: string,
  part: StudyPart,
  id: string,
): Promise<string | null> {
  const table = TABLES[part];
  const [row] = await db
    .select({ studyId: table.studyId })
    .from(table)
    .innerJoin(studies, eq(studies.id, table.studyId))
    .where(and(eq(table.id, id), eq(studies.labId, labId)));
  return row?.studyId ?? null;
}

export async function nextPosition(
  db: Reader,
  part: "axis" | "condition" | "posture",
  studyId: string,
): Promise<number> {
  const table = TABLES[part];
  const [row] = await db
    .select({ last: max(table.position) })
    .from(table)
    .where(eq(table.studyId, studyId));
  return (row?.last ?? -1) + 1;
}

export async function updateCondition(
  tx: Transaction,
  conditionId: string,
  change: Partial<
    Pick<typeof conditions.$inferSelect, "name" | "level" | "levelUnit" | "isBaseline" | "isActive">
  >,
): Promise<void> {
  await tx.update(conditions).set(change).where(eq(conditions.id, conditionId));
}

/** A study has one baseline: the others stop being it. */
export async function clearOtherBaselines(
  tx: Transaction,
  studyId: string,
  conditionId: string,
): Promise<void> {
  await tx
    .update(conditions)
    .set({ isBaseline: false })
    .where(and(eq(conditions.studyId, studyId), ne(conditions.id, conditionId)));
}

/** How many recordings, in whatever state, rest on a part. */
export async function countRecordingsWith(
  db: Reader,
  part: StudyPart,
  id: string,
): Promise<number> {
  switch (part) {
    case "participant":
      return db.$count(recordings, eq(recordings.participantId, id));
    case "condition":
      return db.$count(recordings, eq(recordings.conditionId, id));
    case "posture":
      return db.$count(recordings, eq(recordings.postureId, id));
    case "axis": {
      const rows = await db
        .select({ channelMap: recordings.channelMap, name: studyAxes.name })
        .from(recordings)
        .innerJoin(studyAxes, eq(studyAxes.studyId, recordings.studyId))
        .where(eq(studyAxes.id, id));
      return rows.filter((row) =>
        readMap(row.channelMap).axes.some((axis) => axis.name === row.name),
      ).length;
    }
  }
}

export async function countParts(db: Reader, part: StudyPart, studyId: string): Promise<number> {
  const table = TABLES[part];
  return db.$count(table, eq(table.studyId, studyId));
}

/** Removes a part that no recording rests on. */
export async function deletePart(tx: Transaction, part: StudyPart, id: string): Promise<void> {
  if (part === "participant") await tx.delete(visits).where(eq(visits.participantId, id));
  const table = TABLES[part];
  await tx.delete(table).where(eq(table.id, id));
}
