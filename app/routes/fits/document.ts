import { deskContext } from "#app/auth/context.server.ts";
import { requireActor } from "#app/auth/require.server.ts";
import { getFit } from "#app/db/fits.server.ts";
import { canonicalJson } from "#app/domain/canonical-json.ts";
import { windowsDocumentOf } from "#app/domain/fit.ts";
import { notFound } from "#app/domain/refusal.ts";
import { attachment } from "#app/services/http.server.ts";
import { noteFitDownloaded } from "#app/workflows/note-opening.server.ts";
import type { Route } from "./+types/document.ts";

const DOCUMENTS = ["protocol.json", "windows.json", "result.json"] as const;

/**
 * PROTOCOL, WINDOWS or RESULT of a fit: with the raw file, the headless command makes the fit again
 * from the first two.
 */
export async function loader({ request, context, params }: Route.LoaderArgs) {
  const { actor } = await requireActor(request, context, "download");
  const name = DOCUMENTS.find((each) => each === params.document);
  if (!name) throw notFound();
  const desk = context.get(deskContext);
  const { fit, recording, protocolDocument } = await getFit(desk.store.db, actor.labId, params.id);
  const text = {
    // Byte for byte: protocol_sha256 is of this text.
    "protocol.json": () => protocolDocument,
    "windows.json": () => canonicalJson(windowsDocumentOf(recording.sha256, fit.windows)),
    "result.json": () => JSON.stringify(fit.result),
  }[name]();
  await noteFitDownloaded(desk, actor, { fitId: fit.id, document: name });
  const stem = recording.fileName.replace(/\.[^.]*$/, "");
  return new Response(text, {
    headers: {
      "Content-Type": "application/json; charset=utf-8",
      "Content-Disposition": attachment(`${stem}-fit-${fit.number}-${name}`),
      "Cache-Control": "private, no-cache",
    },
  });
}
