import { z } from "zod";
import { deskContext } from "#app/auth/context.server.ts";
import { requireActor } from "#app/auth/require.server.ts";
import { findStudy } from "#app/db/studies.server.ts";
import { notFound } from "#app/domain/refusal.ts";
import { readJson } from "#app/services/http.server.ts";
import {
  findKnownRecording,
  openUpload,
  openUploadSchema,
  renewParts,
} from "#app/workflows/open-upload.server.ts";
import type { Route } from "./+types/open-upload.ts";

const renewSchema = z.strictObject({
  uploadId: z.string(),
  /** Parts that need a fresh address. */
  renew: z.array(z.int().min(1)).min(1).max(10_000),
});

/** So many hashes are looked up in one request. */
const MOST_HASHES = 50;

/** Which of these bytes the lab has already: `?sha256=…`, once for each file. */
export async function loader({ request, context, params }: Route.LoaderArgs) {
  const { actor, lab } = await requireActor(request, context, "take_in");
  const desk = context.get(deskContext);
  if (!(await findStudy(desk.store.db, lab.id, params.id))) throw notFound();
  const sha256s = new URL(request.url).searchParams.getAll("sha256").slice(0, MOST_HASHES);
  const found = await Promise.all(
    sha256s.map(async (sha256) => ({
      sha256,
      recording: await findKnownRecording(desk, actor.labId, sha256),
    })),
  );
  return Response.json(
    { held: found.filter(({ recording }) => recording !== null) },
    { headers: { "Cache-Control": "no-store" } },
  );
}

/** POST by the take-in page: opens an upload, or renews the addresses of one. */
export async function action({ request, context, params }: Route.ActionArgs) {
  const { actor } = await requireActor(request, context, "take_in");
  const body = await readJson(request, z.union([openUploadSchema, renewSchema]));
  const desk = context.get(deskContext);
  return Response.json(
    "renew" in body
      ? await renewParts(desk, actor, { uploadId: body.uploadId, numbers: body.renew })
      : await openUpload(desk, actor, { studyId: params.id, ...body }),
  );
}
