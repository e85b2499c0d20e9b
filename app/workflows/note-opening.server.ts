import { findLastEvent, recordEvent } from "#app/db/events.server.ts";
import { getFitRow } from "#app/db/fits.server.ts";
import { getRecording } from "#app/db/recordings.server.ts";
import type { Actor } from "#app/domain/role.ts";
import type { Desk } from "./desk.server.ts";
import { requireAbility } from "./permission.server.ts";

/** A page that loads its data again within this time has not been opened again. */
const SAME_OPENING_MS = 10 * 60 * 1000;

/** Opening a recording counts; the page that shows it says so once. */
export async function noteRecordingOpened(
  desk: Desk,
  actor: Actor,
  recordingId: string,
): Promise<void> {
  requireAbility(actor, "read");
  const at = desk.clock.now();
  const match = {
    personId: actor.personId,
    kind: "recording.opened",
    objectType: "recording",
    objectId: recordingId,
  };
  const last = await findLastEvent(desk.store.db, match);
  if (last && at - last.at < SAME_OPENING_MS) return;
  await desk.store.write(async (tx) => {
    await getRecording(tx, actor.labId, recordingId);
    await recordEvent(tx, { ...match, at, labId: actor.labId });
  });
}

export async function noteRecordingDownloaded(
  desk: Desk,
  actor: Actor,
  recordingId: string,
): Promise<void> {
  requireAbility(actor, "download");
  await desk.store.write(async (tx) => {
    const { fileName } = await getRecording(tx, actor.labId, recordingId);
    await recordEvent(tx, {
      at: desk.clock.now(),
      labId: actor.labId,
      personId: actor.personId,
      kind: "recording.downloaded",
      objectType: "recording",
      objectId: recordingId,
      detail: { fileName },
    });
  });
}

export async function noteFitDownloaded(
  desk: Desk,
  actor: Actor,
  input: { fitId: string; document: string },
): Promise<void> {
  requireAbility(actor, "download");
  await desk.store.write(async (tx) => {
    const fit = await getFitRow(tx, actor.labId, input.fitId);
    await recordEvent(tx, {
      at: desk.clock.now(),
      labId: actor.labId,
      personId: actor.personId,
      kind: "fit.downloaded",
      objectType: "fit",
      objectId: fit.id,
      detail: { document: input.document, recordingId: fit.recordingId, number: fit.number },
    });
  });
}
