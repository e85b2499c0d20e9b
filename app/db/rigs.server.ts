import { and, asc, eq, sql } from "drizzle-orm";
import type { Reader, Transaction } from "./client.server.ts";
import { rigs } from "./schema.ts";

export type RigRow = typeof rigs.$inferSelect;

export async function findRig(db: Reader, labId: string, rigId: string): Promise<RigRow | null> {
  const [row] = await db
    .select()
    .from(rigs)
    .where(and(eq(rigs.id, rigId), eq(rigs.labId, labId)));
  return row ?? null;
}

export async function findRigByName(
  db: Reader,
  labId: string,
  name: string,
): Promise<RigRow | null> {
  const [row] = await db
    .select()
    .from(rigs)
    .where(and(eq(rigs.labId, labId), eq(rigs.name, name)));
  return row ?? null;
}

export function listRigs(db: Reader, labId: string): Promise<RigRow[]> {
  return db.select().from(rigs).where(eq(rigs.labId, labId)).orderBy(asc(rigs.name));
}

export async function insertRig(tx: Transaction, row: typeof rigs.$inferInsert): Promise<void> {
  await tx.insert(rigs).values(row);
}

export async function updateRigChannelMap(
  tx: Transaction,
  rigId: string,
  channelMap: string,
): Promise<void> {
  await tx
    .update(rigs)
    .set({ channelMap, version: sql`${rigs.version} + 1` })
    .where(eq(rigs.id, rigId));
}

/** `impedance`: the rig's own K, B, I by axis, JSON with sorted keys. */
export async function updateRigImpedance(
  tx: Transaction,
  rigId: string,
  impedance: string,
): Promise<void> {
  await tx
    .update(rigs)
    .set({ impedance, version: sql`${rigs.version} + 1` })
    .where(eq(rigs.id, rigId));
}
