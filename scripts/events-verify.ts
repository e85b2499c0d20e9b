/**
 * Computes the chain of events again: `npm run events:verify`. The last line says how many there
 * are, or where the chain breaks (exit 1). Rows cut off at the end leave a whole, shorter chain:
 * note the count elsewhere.
 */
import { existsSync } from "node:fs";
import { fileURLToPath } from "node:url";
import { openStore } from "#app/db/client.server.ts";
import { verifyChain } from "#app/db/events.server.ts";
import { EnvError, readEnv } from "#app/env.server.ts";

try {
  process.exitCode = await verify();
} catch (error) {
  console.error(error instanceof EnvError ? error.sentences.join("\n") : error);
  process.exitCode = 1;
}

async function verify(): Promise<number> {
  const { databaseUrl, databaseAuthToken } = readEnv(process.env);
  // Opening would make an empty one, whose chain is whole.
  if (databaseUrl.startsWith("file://") && !existsSync(fileURLToPath(databaseUrl))) {
    console.error(
      `There is no database at ${fileURLToPath(databaseUrl)}: set OGEE_DATA or DATABASE_URL to the installation's.`,
    );
    return 1;
  }
  const store = await openStore(databaseUrl, { authToken: databaseAuthToken });
  try {
    const chain = await verifyChain(store.db);
    if (chain.status === "whole") {
      console.log(`${chain.events} events, chain whole`);
      return 0;
    }
    console.log(
      `Event ${chain.sequence} does not follow from what stands before it: one of the two was changed, ` +
        `taken out or put in. Events before it that hold: ${chain.events}.`,
    );
    return 1;
  } finally {
    store.close();
  }
}
