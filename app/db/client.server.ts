import type { LibSQLDatabase } from "drizzle-orm/libsql";
import type * as schema from "./schema.ts";

export type Database = LibSQLDatabase<typeof schema>;
export type Transaction = Parameters<Parameters<Database["transaction"]>[0]>[0];

export interface Store {
  db: Database;
  /** One writer at a time in this process, one transaction; whatever throws rolls it back. */
  write<T>(work: (tx: Transaction) => Promise<T>): Promise<T>;
  close(): void;
}

/** Opens the database, sets WAL, foreign keys and the busy time-out, and runs the migrations. */
export declare function openStore(url: string, options?: { authToken?: string }): Promise<Store>;
