import { createHash, randomBytes } from "node:crypto";
import { createSessionStorage, type SessionStorage } from "react-router";
import type { Store, Transaction } from "#app/db/client.server.ts";
import { recordEvent } from "#app/db/events.server.ts";
import { findPerson } from "#app/db/people.server.ts";
import {
  deleteSessionsEndedBefore,
  findOpenSession,
  insertSession,
  revokeSession,
  updateSessionLab,
  updateSessionUse,
} from "#app/db/sessions.server.ts";
import type { Clock } from "#app/services/clock.server.ts";

const HOUR_MS = 3_600_000;
/** A session ends this long after it was last used. */
const IDLE_MS = 12 * HOUR_MS;
/** However much it is used, it ends this long after signing in. */
const ABSOLUTE_MS = 7 * 24 * HOUR_MS;
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
  { store, clock }: { store: Store; clock: Clock },
  options: { secret: string; secure: boolean },
): Sessions {
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
    createData: async ({ personId, labId = null }) => {
      if (personId === undefined) throw new RangeError("A session belongs to a person.");
      const token = randomBytes(32).toString("base64url");
      const now = clock.now();
      await store.write(async (tx) => {
        await deleteSessionsEndedBefore(tx, now - KEEP_ENDED_MS);
        await insertSession(tx, {
          id: hashToken(token),
          personId,
          labId,
          createdAt: now,
          lastSeenAt: now,
          expiresAt: now + ABSOLUTE_MS,
        });
        await recordSessionEvent(tx, now, "person.signed_in", { personId, labId });
      });
      return token;
    },
    readData: async (token) => {
      const id = hashToken(token);
      const now = clock.now();
      const session = await findOpenSession(store.db, id, { now, usedAfter: now - IDLE_MS });
      if (session === null) return null;
      if (now >= session.lastSeenAt + NOTE_USE_EVERY_MS) {
        await store.write((tx) => updateSessionUse(tx, id, now));
      }
      return { personId: session.personId, labId: session.labId };
    },
    updateData: async (token, { labId = null }) => {
      await store.write(async (tx) => {
        const session = await updateSessionLab(tx, hashToken(token), labId);
        if (session !== null) {
          await recordSessionEvent(tx, clock.now(), "person.lab_chosen", session);
        }
      });
    },
    deleteData: async (token) => {
      await store.write(async (tx) => {
        const now = clock.now();
        const session = await revokeSession(tx, hashToken(token), now);
        if (session !== null) await recordSessionEvent(tx, now, "person.signed_out", session);
      });
    },
  });
}

/** Who holds the request's cookie, or null where it opens no session. */
export async function findVisitor(
  store: Store,
  sessions: Sessions,
  request: Request,
): Promise<Visitor | null> {
  const session = await sessions.getSession(request.headers.get("Cookie"));
  const personId = session.get("personId");
  if (personId === undefined) return null;
  const row = await findPerson(store.db, personId);
  if (row === null) return null;
  const person = { id: row.id, name: row.name, email: row.email };
  return { person, labId: session.get("labId") ?? null };
}

function hashToken(token: string): string {
  return createHash("sha256").update(token).digest("hex");
}

function recordSessionEvent(
  tx: Transaction,
  at: number,
  kind: string,
  { personId, labId }: SessionContent,
): Promise<void> {
  return recordEvent(tx, { at, labId, personId, kind, objectType: "person", objectId: personId });
}
