import { randomBytes } from "node:crypto";
import { existsSync, mkdirSync, readFileSync, writeFileSync } from "node:fs";
import { join } from "node:path";
import { openStore, type Store } from "#app/db/client.server.ts";
import type { Env } from "#app/env.server.ts";
import { type Clock, systemClock } from "#app/services/clock.server.ts";
import { createStorage, type Storage } from "#app/services/storage.server.ts";

/** What a workflow works with. */
export interface Desk {
  store: Store;
  storage: Storage;
  clock: Clock;
}

/** Opens the installation that the environment names, and runs the migrations. */
export async function openDesk(env: Env): Promise<Desk> {
  mkdirSync(env.dataFolder, { recursive: true });
  const store = await openStore(env.databaseUrl, { authToken: env.databaseAuthToken });
  return { store, storage: createStorage(env.storage), clock: systemClock };
}

/** The secret that the environment names, else this machine's own, made once. */
export function readSessionSecret(env: Env): string {
  if (env.sessionSecret !== null) return env.sessionSecret;
  const file = join(env.dataFolder, "session-secret");
  if (!existsSync(file)) {
    mkdirSync(env.dataFolder, { recursive: true });
    writeFileSync(file, randomBytes(32).toString("base64url"), { mode: 0o600, flag: "wx" });
  }
  return readFileSync(file, "utf8");
}
