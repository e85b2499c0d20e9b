import { deskContext } from "#app/auth/context.server.ts";
import { requireActor } from "#app/auth/require.server.ts";
import { readJson } from "#app/services/http.server.ts";
import {
  findTakenIn,
  settleSoon,
  takeInRecording,
  takeInSchema,
} from "#app/workflows/take-in-recording.server.ts";
import type { Route } from "./+types/finish-upload.ts";

/** How an upload stands, for a page that asks again while a large file is read. */
export async function loader({ request, context, params }: Route.LoaderArgs) {
  const { actor } = await requireActor(request, context, "take_in");
  return Response.json(await findTakenIn(context.get(deskContext), actor, params.id), {
    headers: { "Cache-Control": "no-store" },
  });
}

/** POST by the take-in page: all parts are there, and this is where the recording belongs. */
export async function action({ request, context, params }: Route.ActionArgs) {
  const { actor } = await requireActor(request, context, "take_in");
  const input = await readJson(request, takeInSchema);
  const desk = context.get(deskContext);
  const taken = await takeInRecording(desk, actor, { uploadId: params.id, ...input });
  return Response.json(await settleSoon(desk, actor, taken));
}
