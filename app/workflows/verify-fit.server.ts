import { recordEvent } from "#app/db/events.server.ts";
import {
  type FitRow,
  findFitRow,
  listFitWindows,
  listUnverifiedFits,
  updateVerification,
} from "#app/db/fits.server.ts";
import { getRecording } from "#app/db/recordings.server.ts";
import { compareResults, differenceSentence, windowsDocumentOf } from "#app/domain/fit.ts";
import { parseProtocol } from "#app/domain/protocol.ts";
import type { Result } from "#app/engine/types.ts";
import { log } from "#app/services/log.server.ts";
import { background } from "./background.server.ts";
import type { Desk } from "./desk.server.ts";
import { readHashed } from "./read-hashed.server.ts";

export function secondLookKey(fitId: string): string {
  return `fit:${fitId}`;
}

/** Has the server compute a saved fit again, in the background. */
export function queueSecondLook(desk: Desk, labId: string, fitId: string): void {
  void background.add(secondLookKey(fitId), () => lookAgain(desk, labId, fitId));
}

/** Takes up every fit that the server has not looked at yet. */
export async function resumeSecondLooks(desk: Desk): Promise<number> {
  const rows = await listUnverifiedFits(desk.store.db);
  for (const row of rows) queueSecondLook(desk, row.labId, row.id);
  return rows.length;
}

/** Computes a fit from the stored bytes, its PROTOCOL and its windows, and marks it. */
async function lookAgain(desk: Desk, labId: string, fitId: string): Promise<void> {
  const fit = await findFitRow(desk.store.db, labId, fitId);
  if (fit?.verification !== "unverified") return;
  const note = await findDifference(desk, fit);
  const at = desk.clock.now();
  await desk.store.write(async (tx) => {
    const now = await findFitRow(tx, labId, fitId);
    if (now?.verification !== "unverified") return;
    await updateVerification(tx, fitId, note === null ? "verified" : "differs", note);
    await recordEvent(tx, {
      at,
      labId,
      personId: null,
      kind: note === null ? "fit.verified" : "fit.differs",
      objectType: "fit",
      objectId: fitId,
      detail: { recordingId: fit.recordingId, number: fit.number, note },
    });
  });
}

/** Where the server's numbers are others than the saved ones, in a sentence; null where they agree. */
async function findDifference(desk: Desk, fit: FitRow): Promise<string | null> {
  const recording = await getRecording(desk.store.db, fit.labId, fit.recordingId);
  const { bytes, sha256 } = await readHashed(desk.storage, recording);
  if (sha256 !== recording.sha256) {
    return `The stored file of ${recording.fileName} is no longer the one that was taken in.`;
  }
  const windows = await listFitWindows(desk.store.db, fit.id);
  const outcome = await background.engine.analyze(bytes, parseProtocol(fit.protocolDocument), {
    file: recording.fileName,
    sha256: recording.sha256,
    protocolSha256: fit.protocolSha256,
    windows: windowsDocumentOf(recording.sha256, windows),
  });
  if (outcome.status === "failed") {
    // Tried again and again it would stay unverified, and nobody would be told.
    log.error({ reason: outcome.reason, fitId: fit.id }, "The engine failed on a fit");
    return "The server could not compute this fit because of a fault in Ogee: tell whoever runs it in your lab.";
  }
  if (outcome.status === "refused") {
    return `The server could not compute this fit: ${outcome.sentence}`;
  }
  const saved = JSON.parse(fit.result) as Result;
  // The engine's name may differ after a release; whether its numbers do is what is asked here.
  const difference = compareResults({ ...saved, engine: outcome.result.engine }, outcome.result);
  if (difference === null) return null;
  const engines =
    saved.engine === outcome.result.engine
      ? ""
      : ` It was computed with ${saved.engine}, and the server has ${outcome.result.engine}: load the page again and save once more.`;
  return differenceSentence(difference) + engines;
}
