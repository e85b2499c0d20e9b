/** Serves the built application: `npm run start`, after `npm run build`. */
import { existsSync } from "node:fs";
import { createServer } from "node:http";
import { join } from "node:path";
import { pathToFileURL } from "node:url";
import { EnvError, readEnv } from "#app/env.server.ts";

/** How long answers under way may take when the server is told to stop, and background work after it. */
const GRACE_MS = 10_000;

process.env.NODE_ENV ??= "production";

async function main(): Promise<void> {
  const { host, port, publicUrl } = readEnv(process.env);
  const built = join(import.meta.dirname, "..", "build", "server", "index.js");
  if (!existsSync(built)) throw new Error("There is no build: run npm run build first.");
  const { app, ready, closing }: typeof import("#app/server.ts") = await import(
    pathToFileURL(built).href
  );
  await ready();

  const server = createServer(app);
  server.once("error", (error: NodeJS.ErrnoException) => {
    console.error(
      error.code === "EADDRINUSE"
        ? `Port ${port} on ${host} is taken: set PORT to another.`
        : error.message,
    );
    process.exit(1);
  });
  server.listen(port, host, () => console.log(`Ogee serves ${publicUrl.origin}`));

  let isStopping = false;
  const stop = () => {
    if (isStopping) return;
    isStopping = true;
    setTimeout(() => server.closeAllConnections(), GRACE_MS).unref();
    // What is unfinished by then (the storage does not answer) is taken up at the next start.
    setTimeout(() => process.exit(1), 2 * GRACE_MS).unref();
    server.close(async () => {
      await closing();
      process.exit(0);
    });
    server.closeIdleConnections();
  };
  process.on("SIGTERM", stop);
  process.on("SIGINT", stop);
}

main().catch((error: unknown) => {
  console.error(error instanceof EnvError ? error.sentences.join("\n") : error);
  process.exit(1);
});
