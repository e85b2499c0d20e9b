import { and, eq, gt, isNull, lt } from "drizzle-orm";
import type { Reader, Transaction } from "./client.server.ts";
import { people, sessions } from "./schema.ts";

export async function insertSession(
  tx: Transaction,
  row: {
    id: string;
    personId: string;
    labId: string | null;
    createdAt: number;
    lastSeenAt: number;
    expiresAt: number;
  },
): Promise<void> {
  await tx.insert(sessions).values(row);
}

/** The session if it was not revoked, has not ended, and was used after `usedAfter`. */
export async function findOpenSession(
  db: Reader,
  id: string,
  times: { now: number; usedAfter: number },
): Promise<{ personId: string; labId: string | null; lastSeenAt: number } | null> {
  const [row] = await db
    .select({
      personId: people.id,
      labId: sessions.labId,
      lastSeenAt: sessions.lastSeenAt,
    })
    .from(sessions)
    .innerJoin(people, eq(people.id, sessions.personId))
    .where(
      and(
        eq(sessions.id, id),
        isNull(sessions.revokedAt),
        gt(sessions.expiresAt, times.now),
        gt(sessions.lastSeenAt, times.usedAfter),
      ),
    )
    .limit(1);
  return row ?? null;
}

export async function updateSessionUse(tx: Transaction, id: string, at: number): Promise<void> {
  await tx.update(sessions).set({ lastSeenAt: at }).where(eq(sessions.id, id));
}

/** @returns whose it is, or null where there is no such session or it was revoked */
export function updateSessionLab(
  tx: Transaction,
  id: string,
  labId: string | null,
): Promise<{ personId: string; labId: string | null } | null> {
  return updateUnrevoked(tx, id, { labId });
}

/** @returns whose it was, or null where there was nothing to revoke */
export function revokeSession(
  tx: Transaction,
  id: string,
  at: number,
): Promise<{ personId: string; labId: string | null } | null> {
  return updateUnrevoked(tx, id, { revokedAt: at });
}

export async function deleteSessionsEndedBefore(tx: Transaction, at: number): Promise<void> {
  await tx.delete(sessions).where(lt(sessions.expiresAt, at));
}

async function updateUnrevoked(
  tx: Transaction,
  id: string,
  change: { labId: string | null } | { revokedAt: number },
): Promise<{ personId: string; labId: string | null } | null> {
  const [row] = await tx
    .update(sessions)
    .set(change)
    .where(and(eq(sessions.id, id), isNull(sessions.revokedAt)))
    .returning({ personId: sessions.personId, labId: sessions.labId });
  return row?.personId ? { personId: row.personId, labId: row.labId } : null;
}
