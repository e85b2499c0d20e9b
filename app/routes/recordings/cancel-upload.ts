import { deskContext } from "#app/auth/context.server.ts";
import { requireActor } from "#app/auth/require.server.ts";
import { cancelUpload } from "#app/workflows/open-upload.server.ts";
import type { Route } from "./+types/cancel-upload.ts";

export async function action({ request, context, params }: Route.ActionArgs) {
  const { actor } = await requireActor(request, context, "take_in");
  return Response.json(
    await cancelUpload(context.get(deskContext), actor, { uploadId: params.id }),
  );
}
