import { createHash } from "node:crypto";
import { getRecordingForPerson } from "#app/db/fits.server.ts";
import { listParticipants } from "#app/db/participants.server.ts";
import { findStudyPlan } from "#app/db/studies.server.ts";
import { type SavedWindow, windowsDocumentOf } from "#app/domain/fit.ts";
import { compileProtocol } from "#app/domain/protocol.ts";
import type { RecordingMap } from "#app/domain/recording.ts";
import type { Actor } from "#app/domain/role.ts";
import type { StudySetUp } from "#app/domain/study.ts";
import { analyze, findWindows, prepare, readRecording } from "#app/engine/pipeline.ts";
import type { Impedance, Result } from "#app/engine/types.ts";
import { background } from "#app/workflows/background.server.ts";
import { openUpload } from "#app/workflows/open-upload.server.ts";
import { createStudy } from "#app/workflows/set-up-study.server.ts";
import type { StoreFit } from "#app/workflows/store-fit.server.ts";
import { type TakenIn, takeInRecording } from "#app/workflows/take-in-recording.server.ts";
import type { TestLab } from "./lab.ts";
import { joint, RAD_PER_DEG, rampsAt } from "./made-signals.ts";

export const setUp: StudySetUp = {
  name: "Wrist support",
  rig: { name: "Two-axis wrist rig" },
  axes: [
    { name: "FE", label: "flexion–extension", positive: "extension", negative: "flexion" },
    { name: "RUD", label: "deviation", positive: "radial", negative: "ulnar" },
  ],
  conditions: [
    { name: "Off", level: 0, levelUnit: "kPa", isBaseline: true, isActive: false },
    { name: "On", level: 40, levelUnit: "kPa", isBaseline: false, isActive: false },
  ],
  postures: [{ name: "Neutral" }],
  participants: [
    { code: "W01", testedSide: "right", bodyMassKg: 70, heightM: 1.75 },
    { code: "W02", testedSide: "left", bodyMassKg: null, heightM: null },
  ],
};

export const map: RecordingMap = {
  table: { separator: "auto", decimal: "auto", header_row: "auto" },
  time: { column: "t", unit: "ms" },
  axes: [
    {
      name: "FE",
      angle: { column: "ang_fe", unit: "deg", gain: 1, offset: 0, sign: 1 },
      torque: { column: "trq_fe", unit: "N.m", gain: 1, offset: 0, sign: 1 },
    },
  ],
  trigger: null,
  emg: [],
};

export interface TestStudy {
  studyId: string;
  protocolId: string;
  participantIds: string[];
  conditionIds: string[];
  postureId: string;
}

export async function setUpStudy(
  lab: TestLab,
  values: StudySetUp = setUp,
  actor: Actor = lab.actor("biomechanist"),
): Promise<TestStudy> {
  const created = await createStudy(lab.desk, actor, values);
  if (created.status !== "created") throw new Error(created.sentence);
  const plan = await findStudyPlan(lab.store.db, actor.labId, created.studyId);
  const participants = await listParticipants(lab.store.db, created.studyId);
  return {
    studyId: created.studyId,
    protocolId: created.protocolId,
    participantIds: participants.map((participant) => participant.id),
    conditionIds: plan?.conditions.map((condition) => condition.id) ?? [],
    postureId: plan?.postures[0]?.id ?? "",
  };
}

/**
 * A CSV of ramps of 2° in 80 ms, out and back by turns every 0.75 s at 500 Hz, and the torque of a
 * second-order joint; each movement a little stiffer than the one before, so that windows differ.
 */
export function recordingBytes(
  impedance: Impedance = { K: 2, B: 0.05, I: 0.004 },
  movements = 6,
): Uint8Array {
  const rateHz = 500;
  const ramps = Array.from({ length: movements }, (_, index) => ({
    atS: 0.75 + 0.75 * index,
    amplitudeDeg: index % 2 === 0 ? 2 : -2,
    durationMs: 80,
  }));
  const move = (timeS: number) => rampsAt(ramps, timeS);
  const lines = ["t,ang_fe,trq_fe"];
  for (let sample = 0; sample < (0.75 * movements + 1.5) * rateHz; sample += 1) {
    const timeS = sample / rateHz;
    const movement = Math.max(0, Math.floor(timeS / 0.75 - 0.5));
    const torque = joint(move, { ...impedance, K: impedance.K * (1 + 0.01 * movement) })(timeS);
    const angleDeg = move(timeS).theta / RAD_PER_DEG;
    lines.push(`${sample * 2},${angleDeg.toFixed(6)},${torque.toFixed(7)}`);
  }
  return new TextEncoder().encode(`${lines.join("\n")}\n`);
}

export function sha256Of(bytes: Uint8Array): string {
  return createHash("sha256").update(bytes).digest("hex");
}

export interface PlacedFile {
  bytes: Uint8Array;
  fileName?: string;
  /** As the browser claims it; left out: the true one. */
  sha256?: string;
  participant?: number;
  condition?: number;
  day?: string;
  map?: RecordingMap;
  actor?: Actor;
}

/** Opens an upload and puts its parts into storage, as the take-in page does. */
export async function upload(lab: TestLab, study: TestStudy, file: PlacedFile) {
  const opened = await openUpload(lab.desk, file.actor ?? lab.actor("biomechanist"), {
    studyId: study.studyId,
    fileName: file.fileName ?? "W01_off.csv",
    sizeBytes: file.bytes.length,
    sha256: file.sha256 ?? sha256Of(file.bytes),
  });
  if (opened.status !== "open") throw new Error(`The upload is ${opened.status}.`);
  const parts = opened.parts.map(({ number, url }) => {
    const multipartId = new URL(url).searchParams.get("uploadId") ?? "";
    const start = (number - 1) * opened.partSizeBytes;
    const bytes = file.bytes.subarray(start, start + opened.partSizeBytes);
    const etag = lab.desk.storage.putPart(
      `incoming/${opened.uploadId}`,
      multipartId,
      number,
      bytes,
    );
    return { number, etag };
  });
  return { uploadId: opened.uploadId, parts };
}

export function placeOf(study: TestStudy, file: PlacedFile) {
  return {
    participantId: study.participantIds[file.participant ?? 0] ?? "",
    conditionId: study.conditionIds[file.condition ?? 0] ?? "",
    postureId: study.postureId,
    day: file.day ?? "2026-11-30",
    map: file.map ?? map,
  };
}

/** Takes a file in and waits until its stored copy is verified. */
export async function takeIn(lab: TestLab, study: TestStudy, file: PlacedFile): Promise<TakenIn> {
  const actor = file.actor ?? lab.actor("biomechanist");
  const sent = await upload(lab, study, file);
  const taken = await takeInRecording(lab.desk, actor, { ...sent, ...placeOf(study, file) });
  await background.settled();
  return taken;
}

/** The id of a recording that was taken in and is ready. */
export async function readyRecording(
  lab: TestLab,
  study: TestStudy,
  file: Partial<PlacedFile> = {},
): Promise<string> {
  const taken = await takeIn(lab, study, { bytes: recordingBytes(), ...file });
  if (taken.status !== "verifying") throw new Error(`The recording is ${taken.status}.`);
  return taken.recordingId;
}

/** What the recording's page sends to save a fit: found windows, and the engine's result. */
export async function fitOf(
  lab: TestLab,
  recordingId: string,
  change: (windows: SavedWindow[]) => SavedWindow[] = (windows) => windows,
): Promise<StoreFit> {
  const seen = await getRecordingForPerson(lab.store.db, lab.lab.id, recordingId);
  const [version] = seen.protocols;
  if (!version) throw new Error("The study has no protocol.");
  const { protocol, text } = compileProtocol({
    choices: version.choices,
    map: seen.recording.map,
    axes: seen.axes,
    geometry: seen.visit.geometry,
    rig: seen.rig.impedance,
  });
  const bytes = await lab.desk.storage.read(`raw/${lab.lab.id}/${seen.recording.sha256}`);
  const signals = readRecording(bytes, protocol);
  const found = findWindows(prepare(signals, protocol), protocol);
  const windows = change(
    found.map((window) => ({ ...window, origin: "found" as const, edited: false })),
  );
  const result: Result = analyze({
    protocol,
    protocolSha256: sha256Of(new TextEncoder().encode(text)),
    recordings: [{ file: seen.recording.fileName, sha256: seen.recording.sha256, signals }],
    rig: [],
    windows: windowsDocumentOf(seen.recording.sha256, windows),
  });
  return {
    recordingId,
    protocolId: version.id,
    basedOnFitId: seen.current?.id ?? null,
    windows,
    // As it arrives by way of JSON.
    result: JSON.parse(JSON.stringify(result)) as Result,
  };
}
