import { desc, eq } from "drizzle-orm";
import type { Reader, Transaction } from "./client.server.ts";
import { people, protocols } from "./schema.ts";

export type ProtocolRow = typeof protocols.$inferSelect;

/** A study's versions, the newest first, with who made them. */
export function listProtocols(
  db: Reader,
  studyId: string,
): Promise<(ProtocolRow & { createdByName: string })[]> {
  return db
    .select({
      id: protocols.id,
      studyId: protocols.studyId,
      number: protocols.number,
      kind: protocols.kind,
      choices: protocols.choices,
      note: protocols.note,
      createdBy: protocols.createdBy,
      createdAt: protocols.createdAt,
      createdByName: people.name,
    })
    .from(protocols)
    .innerJoin(people, eq(people.id, protocols.createdBy))
    .where(eq(protocols.studyId, studyId))
    .orderBy(desc(protocols.number));
}

export async function findProtocol(db: Reader, protocolId: string): Promise<ProtocolRow | null> {
  const [row] = await db.select().from(protocols).where(eq(protocols.id, protocolId));
  return row ?? null;
}

export async function findLatestProtocol(db: Reader, studyId: string): Promise<ProtocolRow | null> {
  const [row] = await db
    .select()
    .from(protocols)
    .where(eq(protocols.studyId, studyId))
    .orderBy(desc(protocols.number))
    .limit(1);
  return row ?? null;
}

/** Versions are only ever added. */
export async function insertProtocol(
  tx: Transaction,
  row: typeof protocols.$inferInsert,
): Promise<void> {
  await tx.insert(protocols).values(row);
}
