import { afterAll, afterEach, beforeEach, describe, expect, it, vi } from "vitest";
import { listEvents } from "#app/db/events.server.ts";
import { findRecording, listRecordings } from "#app/db/recordings.server.ts";
import { findRigByName } from "#app/db/rigs.server.ts";
import { recordings } from "#app/db/schema.ts";
import { findStudy } from "#app/db/studies.server.ts";
import { findUpload } from "#app/db/uploads.server.ts";
import { defaultChoices } from "#app/domain/protocol.ts";
import { mapForSide, rigMapSchema } from "#app/domain/rig-map.ts";
import { background } from "#app/workflows/background.server.ts";
import {
  cancelUpload,
  endForgottenUploads,
  openUpload,
  PART_SIZE_BYTES,
  renewParts,
} from "#app/workflows/open-upload.server.ts";
import { resumeWork } from "#app/workflows/resume-work.server.ts";
import { addProtocol } from "#app/workflows/set-up-study.server.ts";
import {
  findTakenIn,
  settleSoon,
  takeInRecording,
} from "#app/workflows/take-in-recording.server.ts";
import { openTestLab, type TestLab } from "../support/lab.ts";
import {
  map,
  placeOf,
  readyRecording,
  recordingBytes,
  setUp,
  setUpStudy,
  sha256Of,
  type TestStudy,
  takeIn,
  upload,
} from "../support/study.ts";

// The engine's thread starts in the first test that needs it: seconds on a busy machine.
vi.setConfig({ testTimeout: 60_000, hookTimeout: 60_000 });

let lab: TestLab;
let study: TestStudy;
beforeEach(async () => {
  lab = await openTestLab();
  study = await setUpStudy(lab);
});
afterEach(async () => {
  await background.settled();
  lab.close();
});
afterAll(() => background.close());

const bytes = recordingBytes();
const person = () => lab.actor("biomechanist");
const eventKinds = async () =>
  (await listEvents(lab.store.db, lab.lab.id)).map((event) => event.kind).reverse();
const objects = () => [...lab.desk.storage.objects.keys()];

describe("opening an upload", () => {
  const file = { fileName: "W01_off.csv", sizeBytes: bytes.length, sha256: sha256Of(bytes) };

  it("gives one address for each part of 8 MiB, all below incoming/", async () => {
    const opened = await openUpload(lab.desk, person(), {
      studyId: study.studyId,
      ...file,
      sizeBytes: 2 * PART_SIZE_BYTES + 1,
    });
    if (opened.status !== "open") throw new Error(opened.status);
    expect(opened.parts.map((part) => part.number)).toEqual([1, 2, 3]);
    for (const { url } of opened.parts) expect(url).toContain(`/incoming/${opened.uploadId}?`);
    expect(await eventKinds()).toContain("upload.opened");
  });

  it.each([
    [0, "W01_off.csv is empty: record again, or look for another copy."],
    [
      2 * 1024 ** 3 + 1,
      "W01_off.csv is over 2 GiB: split the recording into files of one condition each.",
    ],
  ])("refuses a file of %d bytes with a sentence", async (sizeBytes, sentence) => {
    const opened = await openUpload(lab.desk, person(), {
      studyId: study.studyId,
      ...file,
      sizeBytes,
    });
    expect(opened).toEqual({ status: "refused", sentence });
  });

  it("recognises bytes that the lab has already, whatever the file is called", async () => {
    const recordingId = await readyRecording(lab, study, { fileName: "first.csv" });
    const opened = await openUpload(lab.desk, person(), { studyId: study.studyId, ...file });
    expect(opened).toEqual({
      status: "duplicate",
      recording: {
        id: recordingId,
        fileName: "first.csv",
        studyId: study.studyId,
        studyName: setUp.name,
        participantCode: "W01",
        conditionName: "Off",
        day: "2026-11-30",
      },
    });
  });

  it("is for the biomechanist, and for a study of their lab", async () => {
    const input = { studyId: study.studyId, ...file };
    await expect(openUpload(lab.desk, lab.actor("analyst"), input)).rejects.toMatchObject({
      status: 403,
    });
    await expect(openUpload(lab.desk, lab.outsideActor, input)).rejects.toMatchObject({
      status: 404,
    });
  });

  it("renews the addresses of parts for the person who opened it", async () => {
    const { uploadId } = await upload(lab, study, { bytes });
    const renewed = await renewParts(lab.desk, person(), { uploadId, numbers: [1, 1, 2] });
    expect(renewed).toMatchObject({ status: "open", parts: [{ number: 1 }] });
    await expect(
      renewParts(lab.desk, lab.outsideActor, { uploadId, numbers: [1] }),
    ).rejects.toMatchObject({ status: 404 });
    await cancelUpload(lab.desk, person(), { uploadId });
    const ended = await renewParts(lab.desk, person(), { uploadId, numbers: [1] });
    expect(ended.status).toBe("ended");
  });

  it("ends uploads that were left open for a day", async () => {
    const { uploadId } = await upload(lab, study, { bytes });
    lab.desk.clock.advance(23 * 60 * 60 * 1000);
    expect(await endForgottenUploads(lab.desk)).toBe(0);
    lab.desk.clock.advance(2 * 60 * 60 * 1000);
    expect(await endForgottenUploads(lab.desk)).toBe(1);
    expect((await findUpload(lab.store.db, lab.lab.id, uploadId))?.state).toBe("cancelled");
    expect(await eventKinds()).toContain("upload.forgotten");
  });

  it("leaves an upload that is finished while the forgotten ones are ended", async () => {
    const sent = await upload(lab, study, { bytes });
    lab.desk.clock.advance(25 * 60 * 60 * 1000);
    const input = { ...sent, ...placeOf(study, { bytes }) };
    const { store } = lab.desk;
    // It is listed as forgotten, and finished before it is this upload's turn.
    const slow = {
      ...lab.desk,
      store: {
        ...store,
        write: async <T>(work: Parameters<typeof store.write<T>>[0]) => {
          await takeInRecording(lab.desk, person(), input);
          return store.write(work);
        },
      },
    };
    expect(await endForgottenUploads(slow)).toBe(0);
    await background.settled();
    const taken = await findTakenIn(lab.desk, person(), sent.uploadId);
    expect(taken.status).toBe("ready");
    expect(objects()).toEqual([`raw/${lab.lab.id}/${sha256Of(bytes)}`]);
  });
});

describe("taking a recording in", () => {
  it("moves the bytes to their own address, verifies and reads them there, and is then ready", async () => {
    const sent = await upload(lab, study, { bytes });
    const place = placeOf(study, { bytes });
    const taken = await takeInRecording(lab.desk, person(), { ...sent, ...place });
    expect(taken.status).toBe("verifying");
    const settled = await settleSoon(lab.desk, person(), taken);
    expect(settled).toMatchObject({
      status: "ready",
      facts: { samples: 3000, rateHz: 500, gaps: 0, missing: 0 },
    });
    expect(objects()).toEqual([`raw/${lab.lab.id}/${sha256Of(bytes)}`]);
    const [row] = await listRecordings(lab.store.db, lab.lab.id, study.studyId);
    expect(row).toMatchObject({
      state: "ready",
      participantCode: "W01",
      conditionName: "Off",
      day: "2026-11-30",
      axes: ["FE"],
      takenInByName: "The biomechanist",
      fit: null,
    });
    expect((await eventKinds()).slice(-4)).toEqual([
      "upload.opened",
      "rig.channel_map_remembered",
      "recording.taken_in",
      "recording.ready",
    ]);
  });

  it("answers the same when the request comes a second time", async () => {
    const sent = await upload(lab, study, { bytes });
    const place = placeOf(study, { bytes });
    await takeInRecording(lab.desk, person(), { ...sent, ...place });
    await background.settled();
    const again = await takeInRecording(lab.desk, person(), { ...sent, ...place });
    expect(again.status).toBe("ready");
    expect(await findTakenIn(lab.desk, person(), sent.uploadId)).toEqual(again);
    expect(await listRecordings(lab.store.db, lab.lab.id, study.studyId)).toHaveLength(1);
  });

  it("lets two uploads of the same bytes become one recording", async () => {
    const first = await upload(lab, study, { bytes });
    const second = await upload(lab, study, { bytes, fileName: "copy.csv" });
    const place = placeOf(study, { bytes });
    const both = await Promise.all([
      takeInRecording(lab.desk, person(), { ...first, ...place }),
      takeInRecording(lab.desk, person(), { ...second, ...place }),
    ]);
    await background.settled();
    expect(both.map((taken) => taken.status).sort()).toEqual(["duplicate", "verifying"]);
    expect(objects()).toEqual([`raw/${lab.lab.id}/${sha256Of(bytes)}`]);
  });

  it("answers two requests for one upload at once alike, and takes it in once", async () => {
    const sent = await upload(lab, study, { bytes });
    const input = { ...sent, ...placeOf(study, { bytes }) };
    const both = await Promise.all([
      takeInRecording(lab.desk, person(), input),
      takeInRecording(lab.desk, person(), input),
    ]);
    expect(both.map((taken) => taken.status)).toEqual(["verifying", "verifying"]);
    await background.settled();
    expect((await takeInRecording(lab.desk, person(), input)).status).toBe("ready");
    expect(await listRecordings(lab.store.db, lab.lab.id, study.studyId)).toHaveLength(1);
  });

  it("keeps the same bytes of two labs apart", async () => {
    await readyRecording(lab, study);
    const outside = lab.outsideActor;
    const theirs = await setUpStudy(lab, setUp, outside);
    const taken = await takeIn(lab, theirs, { bytes, actor: outside });
    expect((await settleSoon(lab.desk, outside, taken)).status).toBe("ready");
    expect(objects().sort()).toEqual([
      `raw/${lab.lab.id}/${sha256Of(bytes)}`,
      `raw/${lab.otherLab.id}/${sha256Of(bytes)}`,
    ]);
  });

  it("asks for parts that did not arrive, and goes on when they are there", async () => {
    const sent = await upload(lab, study, { bytes });
    const place = placeOf(study, { bytes });
    const wrong = sent.parts.map((part) => ({ ...part, etag: '"other"' }));
    const incomplete = await takeInRecording(lab.desk, person(), {
      uploadId: sent.uploadId,
      parts: wrong,
      ...place,
    });
    expect(incomplete).toEqual({
      status: "incomplete",
      sentence: "Parts of W01_off.csv did not reach the storage: try again.",
    });
    const taken = await takeInRecording(lab.desk, person(), { ...sent, ...place });
    expect(taken.status).toBe("verifying");
  });

  it("refuses bytes that are not those that were hashed, and keeps none of them", async () => {
    const claimed = "0".repeat(64);
    const taken = await takeIn(lab, study, { bytes, sha256: claimed });
    const settled = await settleSoon(lab.desk, person(), taken);
    expect(settled).toMatchObject({
      status: "refused",
      sentence:
        "W01_off.csv was damaged on its way: what is stored is not what was chosen. Add the file again.",
    });
    expect(objects()).toEqual([]);
    expect(await eventKinds()).toContain("recording.refused");
  });

  it("refuses a file that cannot be read with its name, line and reason; the same bytes mapped anew go in", async () => {
    const text = new TextDecoder().decode(bytes).split("\n");
    text[9] = "16,x,0";
    const bad = new TextEncoder().encode(text.join("\n"));
    const refused = await settleSoon(
      lab.desk,
      person(),
      await takeIn(lab, study, { bytes: bad, fileName: "bad.csv" }),
    );
    if (refused.status !== "refused") throw new Error(refused.status);
    expect(refused.sentence).toMatch(/^bad\.csv, line 10: /);
    expect(objects()).toEqual([]);

    // Another column holds what the first map looked for in the broken one.
    const [axis] = map.axes;
    if (!axis) throw new Error("The map has no axis.");
    const anew = {
      ...map,
      axes: [{ ...axis, angle: { ...axis.angle, column: "t", unit: "mrad" as const } }],
    };
    const taken = await takeIn(lab, study, { bytes: bad, fileName: "bad.csv", map: anew });
    const settled = await settleSoon(lab.desk, person(), taken);
    expect(settled).toMatchObject({ status: "ready", recordingId: refused.recordingId });
    const row = await findRecording(lab.store.db, lab.lab.id, refused.recordingId ?? "");
    expect(row).toMatchObject({ state: "ready", refusal: null });
  });

  it("refuses a file that the engine breaks on, instead of trying for ever", async () => {
    vi.spyOn(background.engine, "readFacts").mockResolvedValueOnce({
      status: "failed",
      reason: "RangeError: out of bounds",
    });
    const taken = await takeIn(lab, study, { bytes });
    expect(await settleSoon(lab.desk, person(), taken)).toMatchObject({
      status: "refused",
      sentence:
        "W01_off.csv could not be read because of a fault in Ogee: tell whoever runs it in your lab.",
    });
  });

  it("leaves a file unread whose bytes broke off on their way from the storage, and reads it later", async () => {
    const { storage } = lab.desk;
    const stream = vi.spyOn(storage, "stream").mockImplementationOnce(async (key) => {
      const whole = await storage.read(key);
      return { body: new Blob([whole.slice(0, 100)]).stream(), sizeBytes: whole.length };
    });
    const taken = await takeIn(lab, study, { bytes });
    expect((await settleSoon(lab.desk, person(), taken)).status).toBe("verifying");
    stream.mockRestore();
    await resumeWork(lab.desk);
    await background.settled();
    expect((await settleSoon(lab.desk, person(), taken)).status).toBe("ready");
  });

  it("reads a file without a trigger where the study's protocol finds onsets by one", async () => {
    const added = await addProtocol(lab.desk, person(), {
      studyId: study.studyId,
      basedOnProtocolId: study.protocolId,
      choices: { ...defaultChoices, onset: { ...defaultChoices.onset, from: "trigger" } },
      note: "",
    });
    expect(added.status).toBe("added");
    const taken = await takeIn(lab, study, { bytes });
    expect((await settleSoon(lab.desk, person(), taken)).status).toBe("ready");
  });

  it.each([
    [{ day: "2026-12-03" }, "The visit's day 2026-12-03 is still to come."],
    [
      {
        map: { ...map, axes: map.axes.map((axis) => ({ ...axis, name: "PS" })) },
      },
      'The study has no axis called "PS"; map the recording to one of its axes.',
    ],
    [
      { fileNamePattern: "{person}" },
      "{person} is not known; use {participant}, {condition}, {posture}, {axis}, {repeat} or {any}.",
    ],
  ])("refuses a placing that does not fit: %#", async (change, sentence) => {
    const sent = await upload(lab, study, { bytes });
    const place = { ...placeOf(study, { bytes }), ...change };
    const taken = await takeInRecording(lab.desk, person(), { ...sent, ...place });
    expect(taken).toEqual({ status: "refused", sentence, recordingId: null });
    expect((await findUpload(lab.store.db, lab.lab.id, sent.uploadId))?.state).toBe("open");
  });

  it("knows no participant, condition or upload of another study or lab", async () => {
    const sent = await upload(lab, study, { bytes });
    const place = placeOf(study, { bytes });
    const input = { ...sent, ...place };
    const missing = { status: 404 };
    await expect(
      takeInRecording(lab.desk, person(), { ...input, conditionId: "of-another" }),
    ).rejects.toMatchObject(missing);
    await expect(takeInRecording(lab.desk, lab.outsideActor, input)).rejects.toMatchObject(missing);
    const second = await setUpStudy(lab, { ...setUp, name: "Second" });
    await expect(
      takeInRecording(lab.desk, person(), {
        ...input,
        participantId: second.participantIds[0] ?? "",
      }),
    ).rejects.toMatchObject(missing);
    await expect(takeInRecording(lab.desk, lab.actor("analyst"), input)).rejects.toMatchObject({
      status: 403,
    });
  });

  it("makes one visit of all recordings of a participant's day", async () => {
    await readyRecording(lab, study);
    await readyRecording(lab, study, { bytes: recordingBytes({ K: 3, B: 0.05, I: 0.004 }) });
    await readyRecording(lab, study, {
      bytes: recordingBytes({ K: 4, B: 0.05, I: 0.004 }),
      day: "2026-12-01",
    });
    const rows = await listRecordings(lab.store.db, lab.lab.id, study.studyId);
    expect(new Set(rows.map((row) => row.visitId)).size).toBe(2);
  });

  it("remembers the channel map on the rig for the tested side, and the study's pattern", async () => {
    const sent = await upload(lab, study, { bytes });
    const place = placeOf(study, { bytes, participant: 1 });
    await takeInRecording(lab.desk, person(), {
      ...sent,
      ...place,
      fileNamePattern: "{participant}_{condition}",
    });
    const rig = await findRigByName(lab.store.db, lab.lab.id, "Two-axis wrist rig");
    const remembered = rigMapSchema.parse(JSON.parse(rig?.channelMap ?? "null"));
    expect(mapForSide(remembered, "left", ["FE"])).toEqual({ map, unsure: [] });
    const now = await findStudy(lab.store.db, lab.lab.id, study.studyId);
    expect(now?.fileNamePattern).toBe("{participant}_{condition}");
  });

  it("is taken up by the next process where one ended in the middle", async () => {
    const recordingId = await readyRecording(lab, study);
    // As it stood before the verification: the copy made, nothing said about it.
    await lab.store.write(async (tx) => {
      await tx.update(recordings).set({ state: "verifying", facts: null });
    });
    await resumeWork(lab.desk);
    await background.settled();
    const row = await findRecording(lab.store.db, lab.lab.id, recordingId);
    expect(row?.state).toBe("ready");
    expect(row?.facts).not.toBeNull();
  });

  it("says so where the bytes were lost in between", async () => {
    const recordingId = await readyRecording(lab, study);
    lab.desk.storage.objects.clear();
    await lab.store.write(async (tx) => {
      await tx.update(recordings).set({ state: "verifying", facts: null });
    });
    await resumeWork(lab.desk);
    await background.settled();
    const row = await findRecording(lab.store.db, lab.lab.id, recordingId);
    expect(row).toMatchObject({
      state: "refused",
      refusal: "W01_off.csv was lost on its way to the storage: add the file again.",
    });
  });
});

describe("giving an upload up", () => {
  it("leaves none of its parts in the storage", async () => {
    const { uploadId } = await upload(lab, study, { bytes });
    const multipartId = (await findUpload(lab.store.db, lab.lab.id, uploadId))?.multipartId ?? "";
    await cancelUpload(lab.desk, person(), { uploadId });
    expect(() => lab.desk.storage.putPart(`incoming/${uploadId}`, multipartId, 1, bytes)).toThrow(
      "There is no upload",
    );
  });

  it("gives up the others too where the storage does not answer for one", async () => {
    await upload(lab, study, { bytes });
    await upload(lab, study, { bytes: recordingBytes({ K: 3, B: 0.05, I: 0.004 }) });
    lab.desk.clock.advance(25 * 60 * 60 * 1000);
    const silent = {
      ...lab.desk,
      storage: { ...lab.desk.storage, delete: () => Promise.reject(new Error("no answer")) },
    };
    expect(await endForgottenUploads(silent)).toBe(2);
  });

  it("ends it once, and it cannot be taken in after", async () => {
    const sent = await upload(lab, study, { bytes });
    expect(await cancelUpload(lab.desk, person(), sent)).toEqual({ status: "cancelled" });
    expect(await cancelUpload(lab.desk, person(), sent)).toEqual({ status: "ended" });
    const taken = await takeInRecording(lab.desk, person(), {
      ...sent,
      ...placeOf(study, { bytes }),
    });
    expect(taken).toEqual({
      status: "refused",
      sentence: "The upload of W01_off.csv was given up: add the file again.",
      recordingId: null,
    });
    expect(await eventKinds()).toContain("upload.cancelled");
  });
});
