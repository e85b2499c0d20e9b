import { randomBytes } from "node:crypto";
import { existsSync, mkdirSync, readFileSync, renameSync, writeFileSync } from "node:fs";
import { join } from "node:path";
import { openStore, type Store } from "#app/db/client.server.ts";
import { type Env, SHORTEST_SECRET } from "#app/env.server.ts";
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
  const known = existsSync(file) ? readFileSync(file, "utf8") : "";
  // A process that ended while it wrote may have left less than a secret.
  if (known.length >= SHORTEST_SECRET) return known;
  mkdirSync(env.dataFolder, { recursive: true });
  const made = randomBytes(32).toString("base64url");
  const draft = `${file}.${process.pid}`;
  writeFileSync(draft, made, { mode: 0o600 });
  renameSync(draft, file);
  return made;
}
