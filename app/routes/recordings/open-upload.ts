import { z } from "zod";
import { deskContext } from "#app/auth/context.server.ts";
import { requireActor } from "#app/auth/require.server.ts";
import { readJson } from "#app/services/http.server.ts";
import { openUpload, openUploadSchema, renewParts } from "#app/workflows/open-upload.server.ts";
import type { Route } from "./+types/open-upload.ts";

const renewSchema = z.strictObject({
  uploadId: z.string(),
  /** Parts that need a fresh address. */
  renew: z.array(z.int().min(1)).min(1).max(10_000),
});

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
