import { z } from "zod";
import { recordEvent } from "#app/db/events.server.ts";
import { findRecordingByHash, findRecordingPlace } from "#app/db/recordings.server.ts";
import { findStudy } from "#app/db/studies.server.ts";
import {
  endUpload,
  findUpload,
  insertUpload,
  listForgottenUploads,
  type UploadRow,
} from "#app/db/uploads.server.ts";
import { notFound } from "#app/domain/refusal.ts";
import type { Actor } from "#app/domain/role.ts";
import { log } from "#app/services/log.server.ts";
import type { Desk } from "./desk.server.ts";
import { requireAbility } from "./permission.server.ts";

/** S3 asks for at least 5 MiB in every part but the last. */
export const PART_SIZE_BYTES = 8 * 1024 * 1024;
/** The engine reads a recording whole, in memory. */
const MOST_BYTES = 2 * 1024 ** 3;
const MOST_BYTES_IN_WORDS = "2 GiB";
/** An upload that was left for this long is given up. */
const FORGOTTEN_AFTER_MS = 24 * 60 * 60 * 1000;

export const openUploadSchema = z.strictObject({
  fileName: z.string().trim().min(1, "The file has no name.").max(255),
  sizeBytes: z.int().min(0),
  /** As hashed where the file lies, in lower case. */
  sha256: z.string().regex(/^[0-9a-f]{64}$/),
});

export interface UploadPart {
  number: number;
  /** For one PUT, 10 minutes. */
  url: string;
}

/** The recording that already holds these bytes. */
export interface KnownRecording {
  id: string;
  fileName: string;
  studyId: string;
  studyName: string;
  participantCode: string;
  conditionName: string;
  day: string;
}

export type OpenedUpload =
  | { status: "open"; uploadId: string; partSizeBytes: number; parts: UploadPart[] }
  | { status: "duplicate"; recording: KnownRecording }
  | { status: "refused"; sentence: string };

/** Opens an upload of one file into `incoming/`, unless the lab has these bytes already. */
export async function openUpload(
  desk: Desk,
  actor: Actor,
  input: { studyId: string; fileName: string; sizeBytes: number; sha256: string },
): Promise<OpenedUpload> {
  requireAbility(actor, "take_in");
  const { db } = desk.store;
  if (!(await findStudy(db, actor.labId, input.studyId))) throw notFound();
  if (input.sizeBytes === 0) {
    return {
      status: "refused",
      sentence: `${input.fileName} is empty: record again, or look for another copy.`,
    };
  }
  if (input.sizeBytes > MOST_BYTES) {
    return {
      status: "refused",
      sentence: `${input.fileName} is over ${MOST_BYTES_IN_WORDS}: split the recording into files of one condition each.`,
    };
  }
  const known = await findKnownRecording(desk, actor.labId, input.sha256);
  if (known) return { status: "duplicate", recording: known };

  const uploadId = desk.clock.newId();
  const storageKey = `incoming/${uploadId}`;
  const multipartId = await desk.storage.startMultipart(storageKey);
  const at = desk.clock.now();
  await desk.store.write(async (tx) => {
    await insertUpload(tx, {
      id: uploadId,
      labId: actor.labId,
      studyId: input.studyId,
      personId: actor.personId,
      fileName: input.fileName,
      sizeBytes: input.sizeBytes,
      sha256: input.sha256,
      storageKey,
      multipartId,
      state: "open",
      createdAt: at,
    });
    await recordEvent(tx, {
      at,
      labId: actor.labId,
      personId: actor.personId,
      kind: "upload.opened",
      objectType: "upload",
      objectId: uploadId,
      detail: { studyId: input.studyId, fileName: input.fileName, sizeBytes: input.sizeBytes },
    });
  });
  const numbers = Array.from(
    { length: Math.ceil(input.sizeBytes / PART_SIZE_BYTES) },
    (_, index) => index + 1,
  );
  return {
    status: "open",
    uploadId,
    partSizeBytes: PART_SIZE_BYTES,
    parts: await presign(desk, storageKey, multipartId, numbers),
  };
}

/** A recording that holds these bytes and was not refused. */
export async function findKnownRecording(
  desk: Desk,
  labId: string,
  sha256: string,
): Promise<KnownRecording | null> {
  const row = await findRecordingByHash(desk.store.db, labId, sha256);
  if (!row || row.state === "refused") return null;
  const place = await findRecordingPlace(desk.store.db, labId, row.id);
  if (!place) return null;
  const { recordingId, fileName, studyId, studyName, participantCode, conditionName, day } = place;
  return { id: recordingId, fileName, studyId, studyName, participantCode, conditionName, day };
}

export type RenewedParts =
  | { status: "open"; parts: UploadPart[] }
  | { status: "ended"; sentence: string };

/** Fresh addresses for parts whose own ran out, after a pause or a lost connection. */
export async function renewParts(
  desk: Desk,
  actor: Actor,
  input: { uploadId: string; numbers: readonly number[] },
): Promise<RenewedParts> {
  const upload = await getOwnUpload(desk, actor, input.uploadId);
  if (upload.state !== "open" || upload.multipartId === null) {
    return {
      status: "ended",
      sentence: `The upload of ${upload.fileName} has ended: add the file again.`,
    };
  }
  const most = Math.ceil(upload.sizeBytes / PART_SIZE_BYTES);
  const numbers = [...new Set(input.numbers)].filter((number) => number >= 1 && number <= most);
  return {
    status: "open",
    parts: await presign(desk, upload.storageKey, upload.multipartId, numbers),
  };
}

/** Gives up an open upload; one that has ended stays as it is. */
export async function cancelUpload(
  desk: Desk,
  actor: Actor,
  input: { uploadId: string },
): Promise<{ status: "cancelled" | "ended" }> {
  const upload = await getOwnUpload(desk, actor, input.uploadId);
  const { personId } = actor;
  const isCancelled = await giveUp(desk, upload, { kind: "upload.cancelled", personId });
  return { status: isCancelled ? "cancelled" : "ended" };
}

/** Gives up uploads of all labs that were left open for a day, and removes what they brought. */
export async function endForgottenUploads(desk: Desk): Promise<number> {
  const forgotten = await listForgottenUploads(
    desk.store.db,
    desk.clock.now() - FORGOTTEN_AFTER_MS,
  );
  let ended = 0;
  for (const upload of forgotten) {
    if (await giveUp(desk, upload, { kind: "upload.forgotten", personId: null })) ended += 1;
  }
  return ended;
}

/** @returns false where the upload was finished or given up meanwhile: nothing of it is touched */
async function giveUp(
  desk: Desk,
  upload: UploadRow,
  by: { kind: "upload.cancelled" | "upload.forgotten"; personId: string | null },
): Promise<boolean> {
  const at = desk.clock.now();
  const isGivenUp = await desk.store.write(async (tx) => {
    if (!(await endUpload(tx, upload.id, "open", "cancelled", at))) return false;
    await recordEvent(tx, {
      ...by,
      at,
      labId: upload.labId,
      objectType: "upload",
      objectId: upload.id,
      detail: { fileName: upload.fileName },
    });
    return true;
  });
  if (isGivenUp) {
    try {
      if (upload.multipartId !== null) {
        await desk.storage.abortMultipart(upload.storageKey, upload.multipartId);
      }
      await desk.storage.delete(upload.storageKey);
    } catch (error) {
      // It is given up all the same; what it brought stays below incoming/ until somebody clears it.
      log.warn({ err: error, key: upload.storageKey }, "An upload's bytes could not be removed");
    }
  }
  return isGivenUp;
}

/**
 * Another person's upload answers like one that does not exist.
 *
 * @throws notFound
 */
export async function getOwnUpload(desk: Desk, actor: Actor, uploadId: string): Promise<UploadRow> {
  requireAbility(actor, "take_in");
  const upload = await findUpload(desk.store.db, actor.labId, uploadId);
  if (!upload || upload.personId !== actor.personId) throw notFound();
  return upload;
}

function presign(
  desk: Desk,
  key: string,
  multipartId: string,
  numbers: readonly number[],
): Promise<UploadPart[]> {
  return Promise.all(
    numbers.map(async (number) => ({
      number,
      url: await desk.storage.presignPart(key, multipartId, number),
    })),
  );
}
