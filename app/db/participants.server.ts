import { and, asc, eq, sql } from "drizzle-orm";
import { refusal } from "#app/domain/refusal.ts";
import type { Reader, Transaction } from "./client.server.ts";
import { participants, studies } from "./schema.ts";

export type ParticipantRow = typeof participants.$inferSelect;

/** A study's participants by code. */
export function listParticipants(db: Reader, studyId: string): Promise<ParticipantRow[]> {
  return db
    .select()
    .from(participants)
    .where(eq(participants.studyId, studyId))
    .orderBy(asc(participants.code));
}

/** A participant of this lab, or null. */
export async function findParticipant(
  db: Reader,
  labId: string,
  participantId: string,
): Promise<ParticipantRow | null> {
  const [row] = await db
    .select({ participant: participants })
    .from(participants)
    .innerJoin(studies, eq(studies.id, participants.studyId))
    .where(and(eq(participants.id, participantId), eq(studies.labId, labId)));
  return row?.participant ?? null;
}

export async function findParticipantByCode(
  db: Reader,
  studyId: string,
  code: string,
): Promise<ParticipantRow | null> {
  const [row] = await db
    .select()
    .from(participants)
    .where(and(eq(participants.studyId, studyId), eq(participants.code, code)));
  return row ?? null;
}

export async function insertParticipants(
  tx: Transaction,
  rows: (typeof participants.$inferInsert)[],
): Promise<void> {
  if (rows.length > 0) await tx.insert(participants).values(rows);
}

/** Changes the participant that was seen at `version`; somebody else's change meanwhile is refused. */
export async function updateParticipant(
  tx: Transaction,
  seen: { id: string; version: number },
  change: Partial<Pick<ParticipantRow, "code" | "testedSide" | "bodyMassKg" | "heightM">>,
): Promise<void> {
  const changed = await tx
    .update(participants)
    .set({ ...change, version: sql`${participants.version} + 1` })
    .where(and(eq(participants.id, seen.id), eq(participants.version, seen.version)))
    .returning({ id: participants.id });
  if (changed.length === 0) {
    throw refusal(
      409,
      "This participant was changed meanwhile. Load the page again, then make your change.",
    );
  }
}
