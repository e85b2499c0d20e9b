import { createHash, randomBytes } from "node:crypto";
import { and, eq, isNull, lt } from "drizzle-orm";
import { createSessionStorage, type SessionStorage } from "react-router";
import type { Transaction } from "#app/db/client.server.ts";
import { recordEvent } from "#app/db/events.server.ts";
import { people, sessions } from "#app/db/schema.ts";
import type { Desk } from "./context.server.ts";

const HOUR_MS = 3_600_000;
/** A session ends this long after it was last used. */
export const IDLE_MS = 12 * HOUR_MS;
/** However much it is used, it ends this long after signing in. */
export const ABSOLUTE_MS = 7 * 24 * HOUR_MS;
/** Noting each use would write with each request. */
const NOTE_USE_EVERY_MS = 60_000;
const KEEP_ENDED_MS = 30 * 24 * HOUR_MS;

export interface SessionContent {
  personId: string;
  /** The lab that the person works in now; null until one is chosen. */
  labId: string | null;
}
export type Sessions = SessionStorage<SessionContent>;

/** Who holds the cookie of a request. */
export interface Visitor {
  person: { id: string; name: string; email: string };
  labId: string | null;
}

/**
 * Sessions in the database. The cookie holds a random token, the table its SHA-256. Making, changing
 * and ending one writes the event in the same transaction.
 *
 * @param secure  whether browsers reach the application by https; the cookie is then sent by https
 *   alone and bound to this host
 */
export function openSessions(
  desk: Pick<Desk, "store" | "clock">,
  options: { secret: string; secure: boolean },
): Sessions {
  const { store, clock } = desk;
  return createSessionStorage<SessionContent>({
    cookie: {
      name: options.secure ? "__Host-ogee" : "ogee",
      httpOnly: true,
      sameSite: "lax",
      path: "/",
      secure: options.secure,
      secrets: [options.secret],
      maxAge: ABSOLUTE_MS / 1000,
    },
    createData: async ({ personId, labId }) => {
      if (personId === undefined) throw new RangeError("A session belongs to a person.");
      const token = randomBytes(32).toString("base64url");
      const now = clock.now();
      await store.write(async (tx) => {
        await tx.delete(sessions).where(lt(sessions.expiresAt, now - KEEP_ENDED_MS));
        await tx.insert(sessions).values({
          id: hashToken(token),
          personId,
          labId: labId ?? null,
          createdAt: now,
          lastSeenAt: now,
          expiresAt: now + ABSOLUTE_MS,
        });
        await recordSessionEvent(tx, now, "person.signed_in", personId, labId ?? null);
      });
      return token;
    },
    readData: async (token) => {
      const now = clock.now();
      const [row] = await store.db
        .select()
        .from(sessions)
        .where(and(eq(sessions.id, hashToken(token)), isNull(sessions.revokedAt)))
        .limit(1);
      if (row === undefined || row.personId === null) return null;
      if (now >= row.expiresAt || now >= row.lastSeenAt + IDLE_MS) return null;
      if (now >= row.lastSeenAt + NOTE_USE_EVERY_MS) {
        await store.write((tx) =>
          tx.update(sessions).set({ lastSeenAt: now }).where(eq(sessions.id, row.id)),
        );
      }
      return { personId: row.personId, labId: row.labId };
    },
    updateData: async (token, { labId }) => {
      await store.write(async (tx) => {
        const [row] = await tx
          .update(sessions)
          .set({ labId: labId ?? null })
          .where(and(eq(sessions.id, hashToken(token)), isNull(sessions.revokedAt)))
          .returning({ personId: sessions.personId });
        if (row?.personId) {
          await recordSessionEvent(
            tx,
            clock.now(),
            "person.lab_chosen",
            row.personId,
            labId ?? null,
          );
        }
      });
    },
    deleteData: async (token) => {
      await store.write(async (tx) => {
        const now = clock.now();
        const [row] = await tx
          .update(sessions)
          .set({ revokedAt: now })
          .where(and(eq(sessions.id, hashToken(token)), isNull(sessions.revokedAt)))
          .returning({ personId: sessions.personId, labId: sessions.labId });
        if (row?.personId) {
          await recordSessionEvent(tx, now, "person.signed_out", row.personId, row.labId);
        }
      });
    },
  });
}

/** Who holds the request's cookie, or null where it opens no session. */
export async function findVisitor(
  desk: Pick<Desk, "store">,
  sessionStorage: Sessions,
  request: Request,
): Promise<Visitor | null> {
  const session = await sessionStorage.getSession(request.headers.get("Cookie"));
  const personId = session.get("personId");
  if (personId === undefined) return null;
  const [person] = await desk.store.db
    .select({ id: people.id, name: people.name, email: people.email })
    .from(people)
    .where(eq(people.id, personId))
    .limit(1);
  return person === undefined ? null : { person, labId: session.get("labId") ?? null };
}

function hashToken(token: string): string {
  return createHash("sha256").update(token).digest("hex");
}

function recordSessionEvent(
  tx: Transaction,
  at: number,
  kind: string,
  personId: string,
  labId: string | null,
): Promise<void> {
  return recordEvent(tx, { at, labId, personId, kind, objectType: "person", objectId: personId });
}
