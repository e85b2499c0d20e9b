import { setTimeout } from "node:timers/promises";
import { z } from "zod";
import { type Transaction, violatedConstraint } from "#app/db/client.server.ts";
import { recordEvent } from "#app/db/events.server.ts";
import { readChoices } from "#app/db/fits.server.ts";
import { findParticipant } from "#app/db/participants.server.ts";
import { findLatestProtocol } from "#app/db/protocols.server.ts";
import {
  endVerification,
  ensureVisit,
  findRecording,
  findRecordingByHash,
  getRecording,
  insertRecording,
  listVerifyingRecordings,
  type RecordingRow,
  readFacts,
  readMap,
  retryRecording,
} from "#app/db/recordings.server.ts";
import { findRig, updateRigChannelMap } from "#app/db/rigs.server.ts";
import { findStudy, findStudyPlan, listStudyAxes, updateStudy } from "#app/db/studies.server.ts";
import { endUpload, findFinishedUpload, type UploadRow } from "#app/db/uploads.server.ts";
import { canonicalJson } from "#app/domain/canonical-json.ts";
import { fileNamePatternProblem } from "#app/domain/file-name.ts";
import {
  compileProtocol,
  defaultChoices,
  type ProtocolChoices,
  ProtocolError,
} from "#app/domain/protocol.ts";
import {
  type RecordingFacts,
  type RecordingMap,
  recordingMapSchema,
} from "#app/domain/recording.ts";
import { notFound } from "#app/domain/refusal.ts";
import { rememberMap, rigMapSchema } from "#app/domain/rig-map.ts";
import type { Actor } from "#app/domain/role.ts";
import type { Protocol } from "#app/engine/types.ts";
import { log } from "#app/services/log.server.ts";
import { background } from "./background.server.ts";
import type { Desk } from "./desk.server.ts";
import { findKnownRecording, getOwnUpload, type KnownRecording } from "./open-upload.server.ts";
import { readHashed } from "./read-hashed.server.ts";

const DAY_MS = 24 * 60 * 60 * 1000;

export const takeInSchema = z.strictObject({
  parts: z.array(
    z.strictObject({ number: z.int().min(1).max(10_000), etag: z.string().min(1).max(200) }),
  ),
  participantId: z.string(),
  conditionId: z.string(),
  postureId: z.string(),
  /** Of the visit, ISO 8601. */
  day: z.iso.date("The day of the visit is not a date: write it as 2026-12-01."),
  map: recordingMapSchema,
  /** Kept with the study for the next files; left out: stays as it is. */
  fileNamePattern: z.string().trim().max(200).nullable().optional(),
});

export interface TakeIn extends z.infer<typeof takeInSchema> {
  uploadId: string;
}

export type TakenIn =
  /** Stored; the copy is now being hashed and read. */
  | { status: "verifying"; recordingId: string }
  | { status: "ready"; recordingId: string; facts: RecordingFacts | null }
  | { status: "duplicate"; recording: KnownRecording }
  /** Parts are missing: send them and finish again. */
  | { status: "incomplete"; sentence: string }
  /** This file or its placing will not do as it is. */
  | { status: "refused"; sentence: string; recordingId: string | null };

/**
 * Makes a recording of an upload: bytes complete, placed in the study, mapped. What follows runs in
 * the background (`background.ended(verificationKey(id))`): the server copies the bytes to their
 * own address, hashes and reads the copy, and only then is the recording ready.
 */
export async function takeInRecording(desk: Desk, actor: Actor, input: TakeIn): Promise<TakenIn> {
  const upload = await getOwnUpload(desk, actor, input.uploadId);
  // The answer to the first request may have been lost on its way.
  if (upload.state !== "open") return endedUpload(desk, actor, upload);

  const place = await checkPlace(desk, actor, upload.studyId, input);
  if (place.status === "refused") return { ...place, recordingId: null };
  const patternProblem = input.fileNamePattern && fileNamePatternProblem(input.fileNamePattern);
  if (patternProblem) return { status: "refused", sentence: patternProblem, recordingId: null };

  const complete = await completeObject(desk, actor, upload, input.parts);
  const ended = async () => endedUpload(desk, actor, await getOwnUpload(desk, actor, upload.id));
  if (complete.status === "ended") return ended();
  if (complete.status !== "complete") return complete;

  const recordingId = desk.clock.newId();
  const at = desk.clock.now();
  const stored = await desk.store
    .write(async (tx) => {
      const known = await findRecordingByHash(tx, actor.labId, upload.sha256);
      const isKnown = known !== null && known.state !== "refused";
      // Only one of two requests at once, or of a request and its upload's end, goes on.
      if (!(await endUpload(tx, upload.id, "open", isKnown ? "cancelled" : "finished", at))) {
        return { status: "ended" as const };
      }
      if (isKnown) {
        await recordEvent(tx, {
          at,
          labId: actor.labId,
          personId: actor.personId,
          kind: "upload.cancelled",
          objectType: "upload",
          objectId: upload.id,
          detail: { fileName: upload.fileName, sameAsRecordingId: known.id },
        });
        return { status: "known" as const };
      }
      const visit = await ensureVisit(
        tx,
        { participantId: input.participantId, rigId: place.rigId, day: input.day },
        { id: desk.clock.newId(), createdAt: at },
      );
      const row = {
        labId: actor.labId,
        studyId: upload.studyId,
        participantId: input.participantId,
        conditionId: input.conditionId,
        postureId: input.postureId,
        visitId: visit.id,
        kind: "transient" as const,
        fileName: upload.fileName,
        sizeBytes: upload.sizeBytes,
        sha256: upload.sha256,
        storageKey: `raw/${actor.labId}/${upload.sha256}`,
        state: "verifying" as const,
        channelMap: canonicalJson(input.map),
        takenInBy: actor.personId,
        takenInAt: at,
      };
      const id = known?.id ?? recordingId;
      if (known) await retryRecording(tx, known.id, row);
      else await insertRecording(tx, { ...row, id });
      await rememberOnRig(tx, actor, at, place, input.map);
      await rememberPattern(tx, actor, at, upload.studyId, input.fileNamePattern);
      await recordEvent(tx, {
        at,
        labId: actor.labId,
        personId: actor.personId,
        kind: "recording.taken_in",
        objectType: "recording",
        objectId: id,
        detail: {
          studyId: upload.studyId,
          participantId: input.participantId,
          conditionId: input.conditionId,
          postureId: input.postureId,
          day: input.day,
          fileName: upload.fileName,
          sha256: upload.sha256,
        },
      });
      return { status: "stored" as const, id };
    })
    .catch(async (error: unknown) => {
      // Another process took the same bytes in between our look and our write.
      if (violatedConstraint(error) !== "unique") throw error;
      const known = await findKnownRecording(desk, actor.labId, upload.sha256);
      if (!known) throw error;
      return { status: "known" as const };
    });

  if (stored.status === "ended") return ended();
  if (stored.status === "known") {
    await desk.storage.delete(upload.storageKey);
    const recording = await findKnownRecording(desk, actor.labId, upload.sha256);
    if (!recording) throw notFound();
    return { status: "duplicate", recording };
  }
  queueVerification(desk, actor.labId, stored.id);
  return { status: "verifying", recordingId: stored.id };
}

/** How an upload stands: for a page that asks again while a large file is read. */
export async function findTakenIn(
  desk: Desk,
  actor: Actor,
  uploadId: string,
): Promise<TakenIn | { status: "open" }> {
  const upload = await getOwnUpload(desk, actor, uploadId);
  return upload.state === "open" ? { status: "open" } : endedUpload(desk, actor, upload);
}

/** A file up to this size is verified while the person waits for the answer. */
const SOON_BYTES = 64 * 1024 * 1024;
const SOON_MS = 20_000;

/** Waits for the verification of a small file; of a large or slow one, `findTakenIn` tells later. */
export async function settleSoon(desk: Desk, actor: Actor, taken: TakenIn): Promise<TakenIn> {
  if (taken.status !== "verifying") return taken;
  const { db } = desk.store;
  const row = await getRecording(db, actor.labId, taken.recordingId);
  if (row.sizeBytes > SOON_BYTES) return outcomeOf(row);
  const waiting = new AbortController();
  const late = setTimeout(SOON_MS, undefined, { signal: waiting.signal }).catch(() => undefined);
  await Promise.race([background.ended(verificationKey(row.id)), late]);
  waiting.abort();
  return outcomeOf(await getRecording(db, actor.labId, row.id));
}

async function endedUpload(desk: Desk, actor: Actor, upload: UploadRow): Promise<TakenIn> {
  const row = await findRecordingByHash(desk.store.db, actor.labId, upload.sha256);
  if (upload.state === "cancelled" || !row) {
    const recording = await findKnownRecording(desk, actor.labId, upload.sha256);
    if (recording) return { status: "duplicate", recording };
    return {
      status: "refused",
      sentence: `The upload of ${upload.fileName} was given up: add the file again.`,
      recordingId: null,
    };
  }
  return outcomeOf(row);
}

function outcomeOf(row: RecordingRow): TakenIn {
  switch (row.state) {
    case "verifying":
      return { status: "verifying", recordingId: row.id };
    case "ready":
      return { status: "ready", recordingId: row.id, facts: readFacts(row.facts) };
    case "refused":
      return {
        status: "refused",
        sentence: row.refusal ?? `${row.fileName} was refused: add the file again.`,
        recordingId: row.id,
      };
  }
}

// ---------------------------------------------------------------- what must be right before a row is made

interface Place {
  status: "placed";
  rigId: string;
  testedSide: "left" | "right";
}

async function checkPlace(
  desk: Desk,
  actor: Actor,
  studyId: string,
  input: TakeIn,
): Promise<Place | { status: "refused"; sentence: string }> {
  const { db } = desk.store;
  const study = await findStudyPlan(db, actor.labId, studyId);
  const participant = await findParticipant(db, actor.labId, input.participantId);
  if (
    participant?.studyId !== studyId ||
    !study?.conditions.some((condition) => condition.id === input.conditionId) ||
    !study.postures.some((posture) => posture.id === input.postureId)
  ) {
    throw notFound("The study has no such participant, condition or posture: load the page again.");
  }
  const rig = study.rigId === null ? null : await findRig(db, actor.labId, study.rigId);
  if (!rig) {
    return {
      status: "refused",
      sentence: `${study.name} has no rig yet: name the rig in the study's set-up first.`,
    };
  }
  // A day ahead of the server's is still today somewhere.
  if (Date.parse(input.day) > desk.clock.now() + DAY_MS) {
    return { status: "refused", sentence: `The visit's day ${input.day} is still to come.` };
  }
  try {
    compileProtocol({
      choices: defaultChoices,
      map: input.map,
      axes: study.axes,
      geometry: {},
      rig: null,
    });
  } catch (error) {
    if (error instanceof ProtocolError) return { status: "refused", sentence: error.message };
    throw error;
  }
  return {
    status: "placed",
    rigId: rig.id,
    testedSide: participant.testedSide,
  };
}

async function completeObject(
  desk: Desk,
  actor: Actor,
  upload: UploadRow,
  parts: TakeIn["parts"],
): Promise<
  | { status: "complete" }
  /** Another request has finished or given it up. */
  | { status: "ended" }
  | Extract<TakenIn, { status: "incomplete" | "refused" }>
> {
  const isThere = async () => (await desk.storage.size(upload.storageKey)) === upload.sizeBytes;
  // Complete already where an earlier request got this far and no further.
  if (await isThere()) return { status: "complete" };
  try {
    if (upload.multipartId !== null) {
      const inOrder = [...parts].sort((a, b) => a.number - b.number);
      await desk.storage.finishMultipart(upload.storageKey, upload.multipartId, inOrder);
    }
  } catch {
    // Another request may have put the parts together at the same time, or gone further.
    if (await isThere()) return { status: "complete" };
    if ((await getOwnUpload(desk, actor, upload.id)).state !== "open") return { status: "ended" };
    return {
      status: "incomplete",
      sentence: `Parts of ${upload.fileName} did not reach the storage: try again.`,
    };
  }
  const size = await desk.storage.size(upload.storageKey);
  if (size === upload.sizeBytes) return { status: "complete" };
  const at = desk.clock.now();
  const isRefused = await desk.store.write(async (tx) => {
    if (!(await endUpload(tx, upload.id, "open", "refused", at))) return false;
    await recordEvent(tx, {
      at,
      labId: actor.labId,
      personId: actor.personId,
      kind: "upload.refused",
      objectType: "upload",
      objectId: upload.id,
      detail: { fileName: upload.fileName, expectedBytes: upload.sizeBytes, storedBytes: size },
    });
    return true;
  });
  if (!isRefused) return { status: "ended" };
  await desk.storage.delete(upload.storageKey);
  return {
    status: "refused",
    sentence: `${upload.fileName} has ${upload.sizeBytes} bytes, and ${size ?? 0} arrived: add the file again.`,
    recordingId: null,
  };
}

async function rememberOnRig(
  tx: Transaction,
  actor: Actor,
  at: number,
  place: Place,
  map: RecordingMap,
): Promise<void> {
  const rig = await findRig(tx, actor.labId, place.rigId);
  if (!rig) throw notFound();
  const known = rig.channelMap === null ? null : rigMapSchema.parse(JSON.parse(rig.channelMap));
  const remembered = canonicalJson(rememberMap(known, map, place.testedSide));
  if (known !== null && canonicalJson(known) === remembered) return;
  await updateRigChannelMap(tx, rig.id, remembered);
  await recordEvent(tx, {
    at,
    labId: actor.labId,
    personId: actor.personId,
    kind: "rig.channel_map_remembered",
    objectType: "rig",
    objectId: rig.id,
    detail: { testedSide: place.testedSide },
  });
}

async function rememberPattern(
  tx: Transaction,
  actor: Actor,
  at: number,
  studyId: string,
  pattern: string | null | undefined,
): Promise<void> {
  if (pattern === undefined) return;
  const study = await findStudy(tx, actor.labId, studyId);
  if (!study || study.fileNamePattern === pattern) return;
  await updateStudy(tx, study, { fileNamePattern: pattern });
  await recordEvent(tx, {
    at,
    labId: actor.labId,
    personId: actor.personId,
    kind: "study.file_name_pattern_remembered",
    objectType: "study",
    objectId: studyId,
    detail: { pattern },
  });
}

// ---------------------------------------------------------------- in the background

export function verificationKey(recordingId: string): string {
  return `recording:${recordingId}`;
}

/** Takes up every recording that is still being verified; those under way stay where they are. */
export async function resumeVerifications(desk: Desk): Promise<number> {
  const rows = await listVerifyingRecordings(desk.store.db);
  for (const row of rows) queueVerification(desk, row.labId, row.id);
  return rows.length;
}

function queueVerification(desk: Desk, labId: string, recordingId: string): void {
  const key = verificationKey(recordingId);
  void background.add(key, () => verifyRecording(desk, labId, recordingId), "first");
}

/** Copies an upload to its own address, hashes and reads the copy, and settles the recording. */
async function verifyRecording(desk: Desk, labId: string, recordingId: string): Promise<void> {
  const row = await findRecording(desk.store.db, labId, recordingId);
  if (row?.state !== "verifying") return;
  const upload = await findFinishedUpload(desk.store.db, labId, row.sha256);
  if (upload && (await desk.storage.size(upload.storageKey)) !== null) {
    await desk.storage.copy(upload.storageKey, row.storageKey);
  }
  const outcome = await checkCopy(desk, row);
  if (outcome.state === "ready") {
    // The browser's copy goes before the row is ready: one address holds the bytes from then on.
    if (upload) await desk.storage.delete(upload.storageKey);
  }
  const at = desk.clock.now();
  const isSettled = await desk.store.write(async (tx) => {
    if (!(await endVerification(tx, recordingId, outcome))) return false;
    if (outcome.state === "refused" && upload) {
      await endUpload(tx, upload.id, "finished", "refused", at);
    }
    await recordEvent(tx, {
      at,
      labId,
      personId: null,
      kind: `recording.${outcome.state}`,
      objectType: "recording",
      objectId: recordingId,
      detail:
        outcome.state === "ready"
          ? { sha256: row.sha256, sizeBytes: row.sizeBytes }
          : { sentence: outcome.refusal },
    });
    return true;
  });
  if (isSettled && outcome.state === "refused") {
    // No other row has this address: bytes are held once in a lab.
    await desk.storage.delete(row.storageKey);
    if (upload) await desk.storage.delete(upload.storageKey);
  }
}

async function checkCopy(
  desk: Desk,
  row: RecordingRow,
): Promise<{ state: "ready"; facts: string } | { state: "refused"; refusal: string }> {
  const size = await desk.storage.size(row.storageKey);
  if (size === null) {
    return {
      state: "refused",
      refusal: `${row.fileName} was lost on its way to the storage: add the file again.`,
    };
  }
  const damaged = {
    state: "refused",
    refusal: `${row.fileName} was damaged on its way: what is stored is not what was chosen. Add the file again.`,
  } as const;
  if (size !== row.sizeBytes) return damaged;
  const { bytes, sha256 } = await readHashed(desk.storage, row);
  if (sha256 !== row.sha256) return damaged;
  const outcome = await background.engine.readFacts(bytes, await protocolForReading(desk, row));
  if (outcome.status === "failed") {
    // Tried again and again it would stay unread, and nobody would be told.
    log.error({ reason: outcome.reason, recordingId: row.id }, "The engine failed on a file");
    return {
      state: "refused",
      refusal: `${row.fileName} could not be read because of a fault in Ogee: tell whoever runs it in your lab.`,
    };
  }
  if (outcome.status === "refused") {
    const at = outcome.line === null ? "" : `, line ${outcome.line}`;
    return { state: "refused", refusal: `${row.fileName}${at}: ${outcome.sentence}` };
  }
  return { state: "ready", facts: canonicalJson(outcome.facts) };
}

/**
 * A reader needs the map and little else; the study's newest choices say the rest. Where those ask
 * for what this recording lacks (a trigger), it is read all the same: a fit will say so.
 */
async function protocolForReading(desk: Desk, row: RecordingRow): Promise<Protocol> {
  const latest = await findLatestProtocol(desk.store.db, row.studyId);
  const axes = await listStudyAxes(desk.store.db, row.studyId);
  const compile = (choices: ProtocolChoices) => {
    const map = readMap(row.channelMap);
    return compileProtocol({ choices, map, axes, geometry: {}, rig: null }).protocol;
  };
  try {
    return compile(latest ? readChoices(latest.choices) : defaultChoices);
  } catch (error) {
    if (!(error instanceof ProtocolError)) throw error;
    return compile(defaultChoices);
  }
}
