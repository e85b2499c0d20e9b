import { createHash } from "node:crypto";
import { and, asc, desc, eq, gt, lt } from "drizzle-orm";
import type { Reader, Transaction } from "./client.server.ts";
import { events } from "./schema.ts";

export type EventValue =
  | string
  | number
  | boolean
  | null
  | readonly EventValue[]
  | { readonly [key: string]: EventValue };

export interface NewEvent {
  /** Milliseconds since 1970, UTC. */
  at: number;
  /** Null for what happens outside a lab (signing in). */
  labId: string | null;
  /** Null where nobody is known to have acted. */
  personId: string | null;
  /** "fit.saved", "recording.opened" … */
  kind: string;
  objectType: string;
  objectId: string;
  detail?: { readonly [key: string]: EventValue };
}

export type EventRow = typeof events.$inferSelect;

/** Hash before the first event. */
const START = "0".repeat(64);

/** Appends an event to the chain, in the transaction of the change that it tells of. */
export async function recordEvent(tx: Transaction, event: NewEvent): Promise<void> {
  const [last] = await tx
    .select({ hash: events.hash })
    .from(events)
    .orderBy(desc(events.sequence))
    .limit(1);
  const row = {
    at: event.at,
    labId: event.labId,
    personId: event.personId,
    kind: event.kind,
    objectType: event.objectType,
    objectId: event.objectId,
    detail: JSON.stringify(sorted(event.detail ?? {})),
  };
  await tx.insert(events).values({ ...row, hash: eventHash(last?.hash ?? START, row) });
}

/** SHA-256 over the previous row's hash and this row's values, as one JSON array. */
function eventHash(previous: string, row: Omit<EventRow, "sequence" | "hash">): string {
  const values = [
    previous,
    row.at,
    row.labId,
    row.personId,
    row.kind,
    row.objectType,
    row.objectId,
    row.detail,
  ];
  return createHash("sha256").update(JSON.stringify(values)).digest("hex");
}

export type Chain =
  | { status: "whole"; events: number }
  /** `sequence`: the first row that does not follow from the one before it. */
  | { status: "broken"; events: number; sequence: number };

/**
 * Reads every event in order and computes the chain again. A row that was changed, taken out,
 * put in or moved breaks it; rows cut off at the end leave a whole, shorter chain, so the count is
 * worth noting elsewhere.
 */
export async function verifyChain(db: Reader): Promise<Chain> {
  const PAGE = 1000;
  let previous = START;
  let sequence = 0;
  let count = 0;
  for (;;) {
    const page = await db
      .select()
      .from(events)
      .where(gt(events.sequence, sequence))
      .orderBy(asc(events.sequence))
      .limit(PAGE);
    for (const row of page) {
      if (row.sequence !== sequence + 1 || row.hash !== eventHash(previous, row)) {
        return { status: "broken", events: count, sequence: row.sequence };
      }
      previous = row.hash;
      sequence = row.sequence;
      count += 1;
    }
    if (page.length < PAGE) return { status: "whole", events: count };
  }
}

/** A lab's events, the newest first; `before` is the last sequence of the page before. */
export function listEvents(
  db: Reader,
  labId: string,
  page: {
    before?: number;
    limit?: number;
    objectType?: string;
    objectId?: string;
    kind?: string;
  } = {},
): Promise<EventRow[]> {
  return db
    .select()
    .from(events)
    .where(
      and(
        eq(events.labId, labId),
        page.before === undefined ? undefined : lt(events.sequence, page.before),
        page.objectType === undefined ? undefined : eq(events.objectType, page.objectType),
        page.objectId === undefined ? undefined : eq(events.objectId, page.objectId),
        page.kind === undefined ? undefined : eq(events.kind, page.kind),
      ),
    )
    .orderBy(desc(events.sequence))
    .limit(page.limit ?? 50);
}

/** The last time that this person did this to this object, or null. */
export async function findLastEvent(
  db: Reader,
  match: { personId: string; kind: string; objectType: string; objectId: string },
): Promise<EventRow | null> {
  const [row] = await db
    .select()
    .from(events)
    .where(
      and(
        eq(events.objectType, match.objectType),
        eq(events.objectId, match.objectId),
        eq(events.kind, match.kind),
        eq(events.personId, match.personId),
      ),
    )
    .orderBy(desc(events.sequence))
    .limit(1);
  return row ?? null;
}

/** The same value with every object's keys in code-unit order, so that its JSON is one text. */
function sorted(value: EventValue): EventValue {
  if (Array.isArray(value)) return value.map(sorted);
  if (value === null || typeof value !== "object") return value;
  return Object.fromEntries(
    Object.entries(value)
      .sort(([a], [b]) => (a < b ? -1 : a > b ? 1 : 0))
      .map(([key, inner]) => [key, sorted(inner)]),
  );
}
