import { identifyingHint, proposeFromFileName } from "#app/domain/file-name.ts";
import type { ProtocolChoices } from "#app/domain/protocol.ts";
import type { RecordingMap } from "#app/domain/recording.ts";
import type { RigMap, TestedSide } from "#app/domain/rig-map.ts";
import type { FileHead, FileReading, TableProtocol } from "#app/engine/types.ts";
import {
  channelsInText,
  confirmMovement,
  draftFromColumns,
  draftFromRig,
  isConfirmed,
  type MapDraft,
  problemsOfMap,
  recordingMapOf,
} from "./map-draft.ts";
import { stiffnessSign } from "./movement-words.ts";

/**
 * The files of one take-in: what is known of each, what a person said of it, and how far it has
 * come. Every function gives a new batch; nothing here reads a file or speaks to the server.
 */

/** What the study says, as far as taking in needs it. */
export interface TakeInStudy {
  rigMap: RigMap | null;
  axes: readonly { name: string; label: string; positive: string; negative: string }[];
  conditions: readonly { id: string; name: string }[];
  postures: readonly { id: string; name: string }[];
  participants: readonly { id: string; code: string; testedSide: TestedSide }[];
  /** Of the newest protocol. */
  choices: ProtocolChoices;
  /** Of file names, as the study keeps it. */
  fileNamePattern: string | null;
  /** A visit's day is not after this one, ISO 8601. */
  lastDay: string;
}

/** Where a recording belongs; "" where nobody has said yet. */
export interface Place {
  participantId: string;
  conditionId: string;
  postureId: string;
  /** Of the visit, ISO 8601. */
  day: string;
}

/** The recording that already holds these bytes. */
export interface HeldRecording {
  id: string;
  fileName: string;
  studyName: string;
  participantCode: string;
  conditionName: string;
}

export type Hash =
  | { status: "reading"; bytesRead: number }
  | { status: "read"; sha256: string }
  | { status: "refused"; sentence: string };

export type Sending =
  | { status: "not_asked" }
  | { status: "waiting" }
  | { status: "sending"; sentBytes: number }
  | { status: "broken"; sentBytes: number; sentence: string }
  | { status: "verifying" }
  | { status: "ready"; recordingId: string }
  | { status: "held"; recording: HeldRecording }
  | { status: "refused"; sentence: string };

export interface BatchFile {
  id: string;
  name: string;
  sizeBytes: number;
  /** How the text is laid out: as the rig remembers it, "auto", or as a person chose. */
  table: TableProtocol;
  isTableChosen: boolean;
  /** Null until the file's first part was looked at. */
  head: FileHead | null;
  hash: Hash;
  /** Null: not asked yet, or not in the lab. */
  held: HeldRecording | null;
  place: Place;
  /** What a person chose; the rest follows the file's name. */
  chosen: readonly (keyof Place)[];
  /** A map of its own instead of the one that files with the same columns share. */
  ownMap: MapDraft | null;
  /** The whole file as read last, and the map that it was read with. */
  reading: { key: string; result: FileReading } | null;
  /** By axis: the channels with which a person confirmed the movement in this very file. */
  accepted: Readonly<Record<string, string>>;
  sending: Sending;
}

export interface Batch {
  files: readonly BatchFile[];
  /** Maps that files with the same columns share, by those columns. */
  maps: Readonly<Record<string, MapDraft>>;
  /** Of file names; "" for none. */
  pattern: string;
}

export interface ChosenFile {
  id: string;
  name: string;
  sizeBytes: number;
  /** The day on which the file was written last. */
  day: string;
}

const AUTO: TableProtocol = { separator: "auto", decimal: "auto", header_row: "auto" };

export function startBatch(pattern: string | null): Batch {
  return { files: [], maps: {}, pattern: pattern ?? "" };
}

// ---------------------------------------------------------------- files come and go

/** Puts files on the list. The same file twice is told apart by its hash, not by its name. */
export function addFiles(batch: Batch, study: TakeInStudy, chosen: readonly ChosenFile[]): Batch {
  const added = chosen.map(
    (file): BatchFile => ({
      id: file.id,
      name: file.name,
      sizeBytes: file.sizeBytes,
      table: study.rigMap?.table ?? AUTO,
      isTableChosen: false,
      head: null,
      hash: { status: "reading", bytesRead: 0 },
      held: null,
      place: { ...proposePlace(batch.pattern, study, file.name), day: file.day },
      chosen: [],
      ownMap: null,
      reading: null,
      accepted: {},
      sending: { status: "not_asked" },
    }),
  );
  return { ...batch, files: [...batch.files, ...added] };
}

export function removeFiles(batch: Batch, ids: readonly string[]): Batch {
  return { ...batch, files: batch.files.filter(({ id }) => !ids.includes(id)) };
}

export function findFile(batch: Batch, id: string | null): BatchFile | null {
  return batch.files.find((file) => file.id === id) ?? null;
}

function changeFile(batch: Batch, id: string, change: (file: BatchFile) => BatchFile): Batch {
  return { ...batch, files: batch.files.map((file) => (file.id === id ? change(file) : file)) };
}

// ---------------------------------------------------------------- where a recording belongs

function proposePlace(pattern: string, study: TakeInStudy, fileName: string): Omit<Place, "day"> {
  const said = readName(pattern, study, fileName);
  const idOf = (rows: readonly { id: string }[], index: number) => rows[index]?.id ?? "";
  const only = <Row>(rows: readonly Row[]) => (rows.length === 1 ? 0 : -1);
  const posture = study.postures.findIndex(({ name }) => name === said.posture);
  const condition = study.conditions.findIndex(({ name }) => name === said.condition);
  return {
    participantId: idOf(
      study.participants,
      study.participants.findIndex(({ code }) => code === said.participant),
    ),
    // With one posture or condition there is nothing to ask.
    conditionId: idOf(study.conditions, condition < 0 ? only(study.conditions) : condition),
    postureId: idOf(study.postures, posture < 0 ? only(study.postures) : posture),
  };
}

function readName(pattern: string, study: TakeInStudy, fileName: string) {
  return proposeFromFileName(fileName, pattern.trim() === "" ? null : pattern.trim(), {
    participants: study.participants.map(({ code }) => code),
    conditions: study.conditions.map(({ name }) => name),
    postures: study.postures.map(({ name }) => name),
    axes: study.axes.map(({ name }) => name),
  });
}

/** Reads the names again; what a person chose stays. */
export function setPattern(batch: Batch, study: TakeInStudy, pattern: string): Batch {
  const files = batch.files.map((file) => {
    if (!mayChange(file)) return file;
    const proposed = proposePlace(pattern, study, file.name);
    const place = { ...file.place };
    for (const field of ["participantId", "conditionId", "postureId"] as const) {
      if (!file.chosen.includes(field)) place[field] = proposed[field];
    }
    return { ...file, place };
  });
  return fillMaps({ ...batch, files, pattern }, study);
}

export function setPlace(batch: Batch, ids: readonly string[], change: Partial<Place>): Batch {
  const fields = Object.keys(change) as (keyof Place)[];
  return {
    ...batch,
    files: batch.files.map((file) =>
      ids.includes(file.id) && mayChange(file)
        ? {
            ...file,
            place: { ...file.place, ...change },
            chosen: [...new Set([...file.chosen, ...fields])],
          }
        : file,
    ),
  };
}

export function sideOf(study: TakeInStudy, file: BatchFile): TestedSide | null {
  return study.participants.find(({ id }) => id === file.place.participantId)?.testedSide ?? null;
}

/** A sentence where the file's name seems to tell who was recorded. */
export function nameWarning(study: TakeInStudy, fileName: string): string | null {
  return identifyingHint(fileName, [
    ...study.conditions.map(({ name }) => name),
    ...study.postures.map(({ name }) => name),
    ...study.axes.flatMap(({ name, label, positive, negative }) => [
      name,
      label,
      positive,
      negative,
    ]),
    ...study.participants.map(({ code }) => code),
  ]);
}

// ---------------------------------------------------------------- what was read

/** Says how the text is laid out; the file's first part is looked at again. */
export function setTable(batch: Batch, ids: readonly string[], table: TableProtocol): Batch {
  return {
    ...batch,
    files: batch.files.map((file) =>
      ids.includes(file.id) && mayChange(file)
        ? { ...file, table, isTableChosen: true, head: null, reading: null }
        : file,
    ),
  };
}

export function setHead(batch: Batch, study: TakeInStudy, id: string, head: FileHead): Batch {
  const changed = changeFile(batch, id, (file) =>
    // A layout that the rig remembers from other files is only a first try.
    head.status === "refused" && !file.isTableChosen && !isAuto(file.table)
      ? { ...file, table: AUTO, head: null }
      : { ...file, head },
  );
  return fillMaps(changed, study);
}

function isAuto(table: TableProtocol): boolean {
  return Object.values(table).every((value) => value === "auto");
}

export function setHash(batch: Batch, id: string, hash: Hash): Batch {
  return changeFile(batch, id, (file) => ({ ...file, hash }));
}

export function setHeld(
  batch: Batch,
  held: readonly { sha256: string; recording: HeldRecording }[],
): Batch {
  return {
    ...batch,
    files: batch.files.map((file) => {
      const found = held.find(({ sha256 }) => sha256 === sha256Of(file));
      return found ? { ...file, held: found.recording } : file;
    }),
  };
}

export function setReading(batch: Batch, id: string, key: string, result: FileReading): Batch {
  return changeFile(batch, id, (file) => ({ ...file, reading: { key, result } }));
}

export function setSending(batch: Batch, id: string, sending: Sending): Batch {
  return changeFile(batch, id, (file) => ({ ...file, sending }));
}

export function sha256Of(file: BatchFile): string | null {
  return file.hash.status === "read" ? file.hash.sha256 : null;
}

// ---------------------------------------------------------------- maps

/** Files with the same columns, for the same axes, share a map. */
function columnsKeyOf(batch: Batch, study: TakeInStudy, file: BatchFile): string | null {
  if (file.head?.status !== "read") return null;
  const { axis } = readName(batch.pattern, study, file.name);
  return JSON.stringify([file.head.preview.header, axis]);
}

/** Proposes a map for columns that have none yet. */
function fillMaps(batch: Batch, study: TakeInStudy): Batch {
  const maps = { ...batch.maps };
  for (const file of batch.files) {
    const key = columnsKeyOf(batch, study, file);
    if (key === null || file.head?.status !== "read" || maps[key]) continue;
    const { preview, proposed } = file.head;
    const { axis } = readName(batch.pattern, study, file.name);
    const names = study.axes.map(({ name }) => name);
    const remembered = draftFromRig(study.rigMap, preview.header, names);
    maps[key] =
      remembered &&
      (axis === null || remembered.axes.some((one) => one.name === axis && one.mapped))
        ? onlyAxis(remembered, axis)
        : draftFromColumns(proposed, names, axis);
  }
  return { ...batch, maps };
}

function onlyAxis(map: MapDraft, axis: string | null): MapDraft {
  if (axis === null) return map;
  return {
    ...map,
    axes: map.axes.map((one) => ({ ...one, mapped: one.mapped && one.name === axis })),
  };
}

export function mapOf(batch: Batch, study: TakeInStudy, file: BatchFile): MapDraft | null {
  if (file.head?.status !== "read") return null;
  if (file.ownMap) return file.ownMap;
  const key = columnsKeyOf(batch, study, file);
  return key === null ? null : (batch.maps[key] ?? null);
}

/** The other files that this one shares its map with, in the list's order. */
export function sharersOf(batch: Batch, study: TakeInStudy, file: BatchFile): BatchFile[] {
  const key = columnsKeyOf(batch, study, file);
  if (key === null || file.ownMap) return [];
  return batch.files.filter(
    (other) => other.id !== file.id && !other.ownMap && columnsKeyOf(batch, study, other) === key,
  );
}

/** Changes the map that this file goes by: its own, or the one that it shares. */
export function changeMap(
  batch: Batch,
  study: TakeInStudy,
  id: string,
  change: (map: MapDraft) => MapDraft,
): Batch {
  const file = findFile(batch, id);
  const map = file && mapOf(batch, study, file);
  if (!file || !map || !mayChange(file)) return batch;
  if (file.ownMap) return changeFile(batch, id, (one) => ({ ...one, ownMap: change(map) }));
  const key = columnsKeyOf(batch, study, file);
  return key === null ? batch : { ...batch, maps: { ...batch.maps, [key]: change(map) } };
}

/** From here on this file's map changes alone. */
export function giveOwnMap(batch: Batch, study: TakeInStudy, id: string): Batch {
  return changeFile(batch, id, (file) => ({ ...file, ownMap: mapOf(batch, study, file) }));
}

export function shareMapAgain(batch: Batch, id: string): Batch {
  return changeFile(batch, id, (file) => ({ ...file, ownMap: null }));
}

/** The person saw the movement in this file: it holds for this side of all files with the map. */
export function confirmAxis(batch: Batch, study: TakeInStudy, id: string, axisName: string): Batch {
  const file = findFile(batch, id);
  const side = file && sideOf(study, file);
  if (!file || !side) return batch;
  const changed = changeMap(batch, study, id, (map) => confirmMovement(map, axisName, side));
  return changeFile(changed, id, (one) => {
    const axis = mapOf(changed, study, one)?.axes.find(({ name }) => name === axisName);
    if (!axis) return one;
    return { ...one, accepted: { ...one.accepted, [axisName]: channelsInText(axis, side) } };
  });
}

// ---------------------------------------------------------------- what is to be read next

export type Job =
  | {
      kind: "head";
      id: string;
      table: TableProtocol;
      /** The one axis that the file's name tells of, else all of the study's. */
      axes: { name: string; label: string }[];
    }
  | { kind: "hash"; id: string }
  | { kind: "read"; id: string; key: string; map: RecordingMap };

/** The map that the whole file is read with, every sign as recorded; null while it has gaps. */
export function readingOf(
  batch: Batch,
  study: TakeInStudy,
  file: BatchFile,
): { key: string; map: RecordingMap } | null {
  const draft = mapOf(batch, study, file);
  if (!draft || mapProblemsOf(batch, study, file).length > 0) return null;
  const map = recordingMapOf(draft, file.table, null);
  return { key: JSON.stringify(map), map };
}

export function mapProblemsOf(batch: Batch, study: TakeInStudy, file: BatchFile) {
  const draft = mapOf(batch, study, file);
  if (!draft || file.head?.status !== "read") return [];
  return problemsOfMap(draft, {
    header: file.head.preview.header,
    axes: study.axes,
    needsTrigger: study.choices.onset.from === "trigger",
  });
}

/** First a glance at every file, then the chosen one whole, then hashes, then the others whole. */
export function nextJob(batch: Batch, study: TakeInStudy, chosenId: string | null): Job | null {
  const open = batch.files.filter(
    (file) => mayChange(file) && file.hash.status !== "refused" && !isElsewhere(batch, file),
  );
  const unseen = open.find((file) => file.head === null);
  if (unseen) {
    const { axis } = readName(batch.pattern, study, unseen.name);
    const axes = study.axes
      .filter(({ name }) => axis === null || name === axis)
      .map(({ name, label }) => ({ name, label }));
    return { kind: "head", id: unseen.id, table: unseen.table, axes };
  }
  const readable = open.filter((file) => file.head?.status === "read");
  const toRead = (file: BatchFile): Job | null => {
    const wanted = readingOf(batch, study, file);
    return wanted && file.reading?.key !== wanted.key
      ? { kind: "read", id: file.id, ...wanted }
      : null;
  };
  const chosen = readable.find(({ id }) => id === chosenId);
  const ofChosen = chosen ? toRead(chosen) : null;
  if (ofChosen) return ofChosen;
  const unhashed = readable.find((file) => file.hash.status === "reading");
  if (unhashed) return { kind: "hash", id: unhashed.id };
  for (const file of readable) {
    const job = toRead(file);
    if (job) return job;
  }
  return null;
}

// ---------------------------------------------------------------- how a file stands

export type Standing =
  | { kind: "reading"; share: number | null }
  | { kind: "needs_you"; wants: string[] }
  | { kind: "good" }
  | { kind: "same"; as: string }
  | { kind: "held"; recording: HeldRecording }
  | { kind: "waiting" }
  | { kind: "sending"; share: number }
  | { kind: "broken"; share: number; sentence: string }
  | { kind: "verifying" }
  | { kind: "ready"; recordingId: string }
  | { kind: "refused"; sentence: string };

/** Whether what was said of a file may still be changed. */
export function mayChange(file: BatchFile): boolean {
  return ["not_asked", "broken", "refused"].includes(file.sending.status);
}

/** The earlier file of the list with the same bytes. */
function twinOf(batch: Batch, file: BatchFile): BatchFile | null {
  const sha256 = sha256Of(file);
  if (sha256 === null) return null;
  const first = batch.files.find((other) => sha256Of(other) === sha256);
  return first && first.id !== file.id ? first : null;
}

function isElsewhere(batch: Batch, file: BatchFile): boolean {
  return file.held !== null || twinOf(batch, file) !== null;
}

export function standingOf(batch: Batch, study: TakeInStudy, file: BatchFile): Standing {
  const { sending } = file;
  const share = (bytes: number) => (file.sizeBytes === 0 ? 0 : Math.min(1, bytes / file.sizeBytes));
  switch (sending.status) {
    case "waiting":
      return { kind: "waiting" };
    case "sending":
      return { kind: "sending", share: share(sending.sentBytes) };
    case "broken":
      return { kind: "broken", share: share(sending.sentBytes), sentence: sending.sentence };
    case "verifying":
      return { kind: "verifying" };
    case "ready":
      return { kind: "ready", recordingId: sending.recordingId };
    case "held":
      return { kind: "held", recording: sending.recording };
    case "refused":
      return { kind: "refused", sentence: sending.sentence };
    case "not_asked":
      return standingBefore(batch, study, file, share);
  }
}

function standingBefore(
  batch: Batch,
  study: TakeInStudy,
  file: BatchFile,
  share: (bytes: number) => number,
): Standing {
  if (file.held) return { kind: "held", recording: file.held };
  const twin = twinOf(batch, file);
  if (twin) return { kind: "same", as: twin.name };
  if (file.hash.status === "refused") return { kind: "refused", sentence: file.hash.sentence };
  if (file.head?.status === "refused") {
    return { kind: "refused", sentence: atLine(file.head.sentence, file.head.line) };
  }
  if (file.head === null) return { kind: "reading", share: null };
  const wanted = readingOf(batch, study, file);
  const reading = wanted && file.reading?.key === wanted.key ? file.reading.result : null;
  if (reading?.status === "refused") {
    return { kind: "refused", sentence: atLine(reading.sentence, reading.line) };
  }
  const wants = wantsOf(batch, study, file, reading);
  if (wants.length > 0) return { kind: "needs_you", wants };
  if (file.hash.status === "reading") {
    return { kind: "reading", share: share(file.hash.bytesRead) };
  }
  return reading === null ? { kind: "reading", share: null } : { kind: "good" };
}

/** What only a person can say, in few words each. */
function wantsOf(
  batch: Batch,
  study: TakeInStudy,
  file: BatchFile,
  reading: Extract<FileReading, { status: "read" }> | null,
): string[] {
  const wants: string[] = [];
  if (file.place.participantId === "") wants.push("participant");
  if (file.place.conditionId === "") wants.push("condition");
  if (file.place.postureId === "") wants.push("posture");
  if (file.place.day === "") wants.push("day of the visit");
  if (file.place.day > study.lastDay) wants.push("a day of the visit that is not still to come");
  wants.push(...mapProblemsOf(batch, study, file).map(({ short }) => short));
  const side = sideOf(study, file);
  if (reading === null || side === null) return wants;
  const unconfirmed: string[] = [];
  const odd: string[] = [];
  for (const axis of mapOf(batch, study, file)?.axes ?? []) {
    if (!axis.mapped) continue;
    const label = study.axes.find(({ name }) => name === axis.name)?.label ?? axis.name;
    if (!isConfirmed(axis, side)) {
      unconfirmed.push(label);
      continue;
    }
    const movement = reading.movements.find((one) => one.axis === axis.name);
    if (!movement || file.accepted[axis.name] === channelsInText(axis, side)) continue;
    const signs = { angle: axis.angle.sign[side], torque: axis.torque.sign[side] };
    if (stiffnessSign(movement, signs) === "negative") {
      odd.push(label);
    }
  }
  if (unconfirmed.length > 0) wants.push(`confirm the movement of ${unconfirmed.join(" and ")}`);
  if (odd.length > 0) wants.push(`K would be negative about ${odd.join(" and ")}`);
  return wants;
}

/** A sentence that names its line already stays as it is. */
function atLine(sentence: string, line: number | null): string {
  return line === null || /\bline \d/i.test(sentence) ? sentence : `Line ${line}: ${sentence}`;
}

/** How the whole list stands. */
export interface BatchStanding {
  /** Files that can be taken in now. */
  good: string[];
  needYou: string[];
  reading: number;
  /** Waiting, on their way or being verified. */
  underWay: string[];
  /** Of these the ones that can still be ended. */
  unsent: string[];
  broken: string[];
  ready: number;
  /** Of the files that were asked for: bytes that arrived, and all. */
  sentBytes: number;
  askedBytes: number;
  asked: number;
}

export function standingOfAll(batch: Batch, study: TakeInStudy): BatchStanding {
  const all: BatchStanding = {
    good: [],
    needYou: [],
    reading: 0,
    underWay: [],
    unsent: [],
    broken: [],
    ready: 0,
    sentBytes: 0,
    askedBytes: 0,
    asked: 0,
  };
  for (const file of batch.files) {
    const { kind } = standingOf(batch, study, file);
    if (kind === "good") all.good.push(file.id);
    if (kind === "needs_you") all.needYou.push(file.id);
    if (kind === "reading") all.reading += 1;
    if (kind === "broken") all.broken.push(file.id);
    if (kind === "ready") all.ready += 1;
    if (kind === "waiting" || kind === "sending" || kind === "verifying") {
      all.underWay.push(file.id);
      if (kind !== "verifying") all.unsent.push(file.id);
    }
    const { sending } = file;
    if (sending.status === "not_asked" || sending.status === "refused") continue;
    all.asked += 1;
    all.askedBytes += file.sizeBytes;
    if (sending.status === "waiting") continue;
    all.sentBytes += "sentBytes" in sending ? sending.sentBytes : file.sizeBytes;
  }
  return all;
}
