import { deskContext } from "#app/auth/context.server.ts";
import { isAnswering } from "#app/db/client.server.ts";
import type { Route } from "./+types/ready.ts";

/** 200 where the database and the storage answer, else 503 with which of them does not. */
export async function loader({ context }: Route.LoaderArgs) {
  const { store, storage } = context.get(deskContext);
  const [database, files] = await Promise.all([isAnswering(store.db), storage.ready()]);
  const isReady = database && files;
  return Response.json(
    { status: isReady ? "ready" : "not ready", database, storage: files },
    { status: isReady ? 200 : 503, headers: { "Cache-Control": "no-store" } },
  );
}
