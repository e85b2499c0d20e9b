import { deskContext } from "#app/auth/context.server.ts";
import { requireActor } from "#app/auth/require.server.ts";
import { getRecording } from "#app/db/recordings.server.ts";
import { refusal } from "#app/domain/refusal.ts";
import { attachment } from "#app/services/http.server.ts";
import { noteRecordingDownloaded } from "#app/workflows/note-opening.server.ts";
import type { Route } from "./+types/raw.ts";

/** The raw bytes as taken in. The recording's page reads them; `?download=1` saves them. */
export async function loader({ request, context, params }: Route.LoaderArgs) {
  const isDownload = new URL(request.url).searchParams.get("download") === "1";
  const { actor } = await requireActor(request, context, isDownload ? "download" : "read");
  const { store, storage, clock } = context.get(deskContext);
  const recording = await getRecording(store.db, actor.labId, params.id);
  if (recording.state !== "ready") {
    throw refusal(409, `${recording.fileName} is not ready: its stored copy is not verified.`);
  }
  if (isDownload) await noteRecordingDownloaded({ store, storage, clock }, actor, recording.id);
  const headers = new Headers({
    ETag: `"${recording.sha256}"`,
    // Raw bytes never change, yet who may read them does: the server is asked each time.
    "Cache-Control": "private, no-cache",
    "Content-Type": "application/octet-stream",
    "X-Content-Type-Options": "nosniff",
  });
  if (isDownload) headers.set("Content-Disposition", attachment(recording.fileName));
  if (request.headers.get("If-None-Match") === headers.get("ETag")) {
    return new Response(null, { status: 304, headers });
  }
  const { body, sizeBytes } = await storage.stream(recording.storageKey);
  headers.set("Content-Length", String(sizeBytes));
  return new Response(body, { headers });
}
