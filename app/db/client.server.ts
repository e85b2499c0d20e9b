import { AsyncLocalStorage } from "node:async_hooks";
import { existsSync } from "node:fs";
import { dirname, join } from "node:path";
import { fileURLToPath } from "node:url";
import { createClient } from "@libsql/client";
import { DrizzleQueryError, sql } from "drizzle-orm";
import { drizzle, type LibSQLDatabase } from "drizzle-orm/libsql";
import { migrate } from "drizzle-orm/libsql/migrator";
import * as schema from "./schema.ts";

export type Database = LibSQLDatabase<typeof schema>;
export type Transaction = Parameters<Parameters<Database["transaction"]>[0]>[0];
/** For queries that serve both a loader and a workflow inside its transaction. */
export type Reader = Database | Transaction;

export interface Store {
  /** For reading. Writing past `write` would meet its transaction and freeze the process. */
  db: Database;
  /** One writer at a time in this process, one transaction; whatever throws rolls it back. */
  write<T>(work: (tx: Transaction) => Promise<T>): Promise<T>;
  close(): void;
}

export interface StoreOptions {
  authToken?: string | undefined;
  /** Another folder of migrations than the project's own, for tests. */
  migrationsFolder?: string;
}

/**
 * How long a writer waits for another process, ms. The wait blocks the event loop, so it is short;
 * writers of this process never wait here but in `write`'s queue.
 */
const BUSY_TIMEOUT_MS = 2000;

/** Opens the database, sets WAL, foreign keys and the busy time-out, and runs the migrations. */
export async function openStore(url: string, options: StoreOptions = {}): Promise<Store> {
  const client = createClient({
    url,
    timeout: BUSY_TIMEOUT_MS,
    ...(options.authToken === undefined ? {} : { authToken: options.authToken }),
  });
  try {
    // Stays in the file; a remote database decides its journal itself.
    if (client.protocol === "file") await client.execute("PRAGMA journal_mode = WAL");
    // On for every connection of this client already; asked for, so that a build without it stops.
    const answer = await client.execute("PRAGMA foreign_keys");
    if (Number(answer.rows[0]?.[0] ?? 0) !== 1) {
      throw new Error("The database does not hold foreign keys: use a libSQL that does.");
    }
    const db = drizzle(client, { schema });
    await migrate(db, { migrationsFolder: options.migrationsFolder ?? findMigrations() });
    return {
      db,
      write: oneAtATime((work) => db.transaction(work)),
      close: () => client.close(),
    };
  } catch (error) {
    client.close();
    throw error;
  }
}

/** Whether the database can be read now. */
export async function isAnswering(db: Database): Promise<boolean> {
  try {
    await db.run(sql`select 1 from labs limit 1`);
    return true;
  } catch {
    return false;
  }
}

/** Which constraint a failed write met, or null where it failed for another reason. */
export function violatedConstraint(error: unknown): "unique" | "foreign_key" | "check" | null {
  const cause = error instanceof DrizzleQueryError ? error.cause : error;
  if (typeof cause !== "object" || cause === null || !("extendedCode" in cause)) return null;
  switch (cause.extendedCode) {
    case "SQLITE_CONSTRAINT_UNIQUE":
    case "SQLITE_CONSTRAINT_PRIMARYKEY":
      return "unique";
    case "SQLITE_CONSTRAINT_FOREIGNKEY":
      return "foreign_key";
    case "SQLITE_CONSTRAINT_CHECK":
      return "check";
    default:
      return null;
  }
}

/** A promise chain round all writes: SQLite has one writer, and a busy wait would block the loop. */
function oneAtATime(transaction: Database["transaction"]): Store["write"] {
  const inside = new AsyncLocalStorage<true>();
  let last: Promise<unknown> = Promise.resolve();
  return <T>(work: (tx: Transaction) => Promise<T>): Promise<T> => {
    // It would wait for itself for ever.
    if (inside.getStore()) {
      return Promise.reject(new RangeError("A write inside a write: pass the transaction on."));
    }
    const result = last.then(() => inside.run(true, () => transaction(work)));
    last = result.catch(() => undefined);
    return result;
  };
}

/** `drizzle/` of the project, from the source as well as from the built server. */
function findMigrations(): string {
  let folder = dirname(fileURLToPath(import.meta.url));
  while (!existsSync(join(folder, "drizzle", "meta", "_journal.json"))) {
    const parent = dirname(folder);
    if (parent === folder) throw new Error("The folder drizzle/ with the migrations is missing.");
    folder = parent;
  }
  return join(folder, "drizzle");
}
