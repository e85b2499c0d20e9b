/** Brings the database up to this version: `npm run migrate`. The server does the same at start. */
import { openDesk } from "#app/auth/desk.server.ts";
import { EnvError, readEnv } from "#app/env.server.ts";

try {
  const { store } = await openDesk(readEnv(process.env));
  store.close();
  console.log("The database is up to date.");
} catch (error) {
  console.error(error instanceof EnvError ? error.sentences.join("\n") : error);
  process.exitCode = 1;
}
