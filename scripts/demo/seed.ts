/**
 * Fills an empty installation with the invented study: every recording goes in through the same
 * workflows as a person's, and every number comes from the engine. What stands already is left.
 */
import { createHash } from "node:crypto";
import type { Desk } from "#app/auth/desk.server.ts";
import { openDesk } from "#app/auth/desk.server.ts";
import { hashPassword } from "#app/auth/password.server.ts";
import { recordEvent } from "#app/db/events.server.ts";
import { findCurrentFit, findRecordingContext, getFitRow } from "#app/db/fits.server.ts";
import { listParticipants } from "#app/db/participants.server.ts";
import {
  findLabByName,
  findPersonByEmail,
  insertMembership,
  insertPerson,
} from "#app/db/people.server.ts";
import { findLatestProtocol } from "#app/db/protocols.server.ts";
import { findRecordingByHash } from "#app/db/recordings.server.ts";
import { findRig } from "#app/db/rigs.server.ts";
import { findStudyByName, findStudyPlan } from "#app/db/studies.server.ts";
import { type SavedWindow, windowsDocumentOf } from "#app/domain/fit.ts";
import {
  compileProtocol,
  defaultChoices,
  type ProtocolChoices,
  parseProtocol,
} from "#app/domain/protocol.ts";
import type { RecordingMap } from "#app/domain/recording.ts";
import type { Actor, Role } from "#app/domain/role.ts";
import { analyze, findWindows, prepare, readRecording } from "#app/engine/pipeline.ts";
import { readEnv } from "#app/env.server.ts";
import { background } from "#app/workflows/background.server.ts";
import { makeLab } from "#app/workflows/make-lab.server.ts";
import { measureRig } from "#app/workflows/measure-rig.server.ts";
import { openUpload } from "#app/workflows/open-upload.server.ts";
import { resumeWork } from "#app/workflows/resume-work.server.ts";
import { openResiduals, reviewFit } from "#app/workflows/review-fit.server.ts";
import { createStudy } from "#app/workflows/set-up-study.server.ts";
import { compileFor, storeFit } from "#app/workflows/store-fit.server.ts";
import { submitFit } from "#app/workflows/submit-fit.server.ts";
import { takeInRecording, verificationKey } from "#app/workflows/take-in-recording.server.ts";
import { queueSecondLook, secondLookKey } from "#app/workflows/verify-fit.server.ts";
import {
  AXES,
  CONDITIONS,
  FILE_NAME_PATTERN,
  LAB_NAME,
  listRecordings,
  makeEmptyRigFile,
  makeRecordingFile,
  ORIGIN,
  PARTICIPANTS,
  POSTURE,
  RAMP_AMPLITUDE_DEG,
  RAMP_DURATION_MS,
  RIG_NAME,
  type ScenarioRecording,
  STUDY_NAME,
} from "./scenario.ts";

interface DemoPerson {
  role: Role;
  name: string;
  email: string;
  password: string;
}

/** No secret: these accounts exist in the demo alone, which only this machine reaches. */
const PASSWORD = "bench-notebook-2026";

export const DEMO_PEOPLE: readonly DemoPerson[] = [
  { role: "biomechanist", name: "Robin", email: "robin@ogee.example", password: PASSWORD },
  { role: "analyst", name: "Ari", email: "ari@ogee.example", password: PASSWORD },
  { role: "reviewer", name: "Remy", email: "remy@ogee.example", password: PASSWORD },
  { role: "manager", name: "Mika", email: "mika@ogee.example", password: PASSWORD },
];

/** 100 Hz and 2 kHz carry a 40 ms ramp; 30 ms and the filter's reach end before the reflex limit. */
const CHOICES: ProtocolChoices = {
  ...defaultChoices,
  filter: { family: "butterworth", order: 2, cutoff_hz: 100 },
  onset: {
    ...defaultChoices.onset,
    cutoff_hz: 100,
    expected_amplitude_deg: RAMP_AMPLITUDE_DEG,
    expected_duration_ms: RAMP_DURATION_MS,
  },
  reflex_limit_ms: 35,
  baseline_ms: [-60, -10],
  window_ms: [0, 30],
};

function mapFor(side: "left" | "right"): RecordingMap {
  return {
    table: { separator: "auto", decimal: "auto", header_row: "auto" },
    time: { column: "t", unit: "ms" },
    axes: AXES.map((axis) => {
      const suffix = axis.name === "FE" ? "fe" : "ru";
      const sign = axis.name === "FE" && side === "left" ? -1 : 1;
      return {
        name: axis.name,
        angle: { column: `ang_${suffix}`, unit: "deg", gain: 1, offset: 0, sign },
        torque: { column: `trq_${suffix}`, unit: "N.m", gain: 1, offset: 0, sign },
      };
    }),
    trigger: "trig",
    emg: [],
  };
}

type Actors = Record<Role, Actor>;

/** @param env  the settings of the server that will run; @param say  told what is being done */
export async function seedDemo(
  env: Record<string, string | undefined>,
  say: (line: string) => void,
): Promise<void> {
  const desk = withDemoClock(await openDesk(readEnv(env)));
  try {
    const actors = await makePeople(desk);
    const studyId = await makeStudy(desk, actors);
    // What an interrupted start left in the middle.
    await resumeWork(desk);
    await background.settled();
    await measureDemoRig(desk, actors, studyId);
    const recordings = listRecordings();
    for (const [index, recording] of recordings.entries()) {
      const isNew = await seedRecording(desk, actors, studyId, recording, index);
      if (isNew && (index + 1) % 10 === 0) {
        say(`Took in ${index + 1} of ${recordings.length} invented recordings.`);
      }
    }
    await background.settled();
  } finally {
    await background.close();
    desk.store.close();
  }
}

/** The study was recorded and fitted in the weeks before today; each step takes some seconds. */
function withDemoClock(desk: Desk): Desk {
  const DAY_MS = 86_400_000;
  let now = Math.min(Date.UTC(2026, 10, 16, 8), Date.now() - 7 * DAY_MS);
  return { ...desk, clock: { ...desk.clock, now: () => (now += 23_000) } };
}

async function makePeople(desk: Desk): Promise<Actors> {
  const manager = DEMO_PEOPLE.find((person) => person.role === "manager") as DemoPerson;
  const known = await findLabByName(desk.store.db, LAB_NAME);
  let labId = known?.id;
  if (!labId) {
    const made = await makeLab(desk, {
      labName: LAB_NAME,
      person: {
        name: manager.name,
        email: manager.email,
        passwordHash: await hashPassword(manager.password),
      },
      roles: [manager.role],
    });
    if (made.status !== "made") throw new Error(`The lab ${LAB_NAME} could not be made.`);
    labId = made.labId;
  }
  const actors: Partial<Actors> = {};
  for (const person of DEMO_PEOPLE) {
    const personId = await findOrAddPerson(desk, labId, person);
    actors[person.role] = { personId, labId, roles: [person.role] };
  }
  return actors as Actors;
}

async function findOrAddPerson(desk: Desk, labId: string, person: DemoPerson): Promise<string> {
  const known = await findPersonByEmail(desk.store.db, person.email);
  if (known) return known.id;
  const personId = desk.clock.newId();
  const passwordHash = await hashPassword(person.password);
  const createdAt = desk.clock.now();
  await desk.store.write(async (tx) => {
    const { name, email, role } = person;
    await insertPerson(tx, { id: personId, name, email, passwordHash, createdAt });
    const membershipId = desk.clock.newId();
    await insertMembership(tx, { id: membershipId, labId, personId, roles: [role], createdAt });
    await recordEvent(tx, {
      at: createdAt,
      labId,
      personId: null,
      kind: "member.added",
      objectType: "person",
      objectId: personId,
      detail: { roles: [role] },
    });
  });
  return personId;
}

async function makeStudy(desk: Desk, actors: Actors): Promise<string> {
  const known = await findStudyByName(desk.store.db, actors.manager.labId, STUDY_NAME);
  if (known) return known.id;
  const created = await createStudy(
    desk,
    actors.manager,
    {
      name: STUDY_NAME,
      rig: { name: RIG_NAME },
      axes: AXES.map((axis) => ({ ...axis })),
      conditions: CONDITIONS.map(({ name, level, isBaseline, isActive }) => ({
        name,
        level,
        levelUnit: level === null ? null : "1",
        isBaseline,
        isActive,
      })),
      postures: [{ name: POSTURE }],
      participants: PARTICIPANTS.map(({ code, testedSide, bodyMassKg, heightM }) => ({
        code,
        testedSide,
        bodyMassKg,
        heightM,
      })),
    },
    { choices: CHOICES, origin: ORIGIN },
  );
  if (created.status !== "created") throw new Error(created.sentence);
  return created.studyId;
}

async function measureDemoRig(desk: Desk, actors: Actors, studyId: string): Promise<void> {
  const plan = await findStudyPlan(desk.store.db, actors.manager.labId, studyId);
  if (!plan?.rigId) throw new Error("The demo's study has no rig.");
  const rig = await findRig(desk.store.db, actors.manager.labId, plan.rigId);
  if (rig?.impedance) return;
  const { text } = compileProtocol({
    choices: CHOICES,
    map: mapFor("right"),
    axes: plan.axes,
    geometry: {},
    rig: null,
  });
  const measured = await measureRig(desk, actors.manager, {
    rigId: plan.rigId,
    fileName: "rig_empty_a.csv",
    bytes: makeEmptyRigFile(900),
    protocol: parseProtocol(text),
  });
  if (measured.status !== "measured") throw new Error(measured.sentence);
}

// ---------------------------------------------------------------- one recording

/** @returns whether anything was left to do */
async function seedRecording(
  desk: Desk,
  actors: Actors,
  studyId: string,
  recording: ScenarioRecording,
  index: number,
): Promise<boolean> {
  const { db } = desk.store;
  const { labId } = actors.biomechanist;
  const bytes = makeRecordingFile(recording, 1000 + index);
  const sha256 = createHash("sha256").update(bytes).digest("hex");
  let row = await findRecordingByHash(db, labId, sha256);
  if (!row || row.state === "refused") {
    await takeIn(desk, actors.biomechanist, studyId, recording, bytes, sha256);
    row = await findRecordingByHash(db, labId, sha256);
  }
  if (row) await background.ended(verificationKey(row.id));
  row = await findRecordingByHash(db, labId, sha256);
  if (row?.state !== "ready") {
    throw new Error(`${recording.fileName} was not taken in: ${row?.refusal ?? "no reason"}`);
  }
  const goal = goalOf(recording);
  if (goal === "recorded") return false;
  // A start that was interrupted goes on from the state that it reached.
  const current = await findCurrentFit(db, row.id);
  const fitId = current?.id ?? (await saveFit(desk, actors.biomechanist, row.id, bytes, recording));
  if (goal !== "draft") await handOn(desk, actors, fitId, goal);
  return current === null;
}

/** How far each recording has come: enough of each state to see what it looks like. */
function goalOf({ participant, condition, defect }: ScenarioRecording) {
  if (defect === "wrong amplitude") return "returned";
  if (participant.code === "W06")
    return condition.level === null || condition.level > 1 ? "recorded" : "draft";
  if (participant.code === "W05") return condition.isActive ? "draft" : "submitted";
  return "approved";
}

async function takeIn(
  desk: Desk,
  actor: Actor,
  studyId: string,
  recording: ScenarioRecording,
  bytes: Uint8Array,
  sha256: string,
): Promise<void> {
  const { db } = desk.store;
  const { fileName, participant, condition } = recording;
  const plan = await findStudyPlan(db, actor.labId, studyId);
  const participants = await listParticipants(db, studyId);
  const opened = await openUpload(desk, actor, {
    studyId,
    fileName,
    sizeBytes: bytes.length,
    sha256,
  });
  if (opened.status !== "open") throw new Error(`${fileName} could not be sent: ${opened.status}`);
  const parts: { number: number; etag: string }[] = [];
  for (const part of opened.parts) {
    const from = (part.number - 1) * opened.partSizeBytes;
    const answer = await fetch(part.url, {
      method: "PUT",
      body: bytes.slice(from, from + opened.partSizeBytes),
    });
    const etag = answer.headers.get("etag");
    if (!answer.ok || !etag) throw new Error(`${fileName}: the storage answered ${answer.status}`);
    parts.push({ number: part.number, etag });
  }
  const idOf = (rows: readonly { id: string }[] | undefined, what: string, at: number): string => {
    const id = rows?.[at]?.id;
    if (!id) throw new Error(`The demo's study has no ${what}.`);
    return id;
  };
  const taken = await takeInRecording(desk, actor, {
    uploadId: opened.uploadId,
    parts,
    participantId: idOf(
      participants,
      participant.code,
      participants.findIndex((row) => row.code === participant.code),
    ),
    conditionId: idOf(
      plan?.conditions,
      condition.name,
      (plan?.conditions ?? []).findIndex((row) => row.name === condition.name),
    ),
    postureId: idOf(plan?.postures, POSTURE, 0),
    day: participant.day,
    map: mapFor(participant.testedSide),
    fileNamePattern: FILE_NAME_PATTERN,
  });
  if (taken.status === "refused" || taken.status === "incomplete") {
    throw new Error(`${fileName}: ${taken.sentence}`);
  }
}

async function saveFit(
  desk: Desk,
  actor: Actor,
  recordingId: string,
  bytes: Uint8Array,
  recording: ScenarioRecording,
): Promise<string> {
  const { db } = desk.store;
  const context = await findRecordingContext(db, actor.labId, recordingId);
  const row = context && (await findLatestProtocol(db, context.study.id));
  if (!context || !row) throw new Error(`${recording.fileName} has no protocol.`);
  const compiled = compileFor(context, row);
  if (compiled.status !== "compiled") throw new Error(compiled.sentence);
  const protocol = parseProtocol(compiled.text);
  const signals = readRecording(bytes, protocol);
  const windows: SavedWindow[] = findWindows(prepare(signals, protocol), protocol).map(
    (window) => ({ ...window, origin: "found", edited: false }),
  );
  setOneAside(recording, windows);
  const { sha256, fileName } = context.recording;
  const result = analyze({
    protocol,
    protocolSha256: compiled.sha256,
    recordings: [{ file: fileName, sha256, signals }],
    rig: [],
    windows: windowsDocumentOf(sha256, windows),
  });
  const stored = await storeFit(desk, actor, {
    recordingId,
    protocolId: row.id,
    basedOnFitId: null,
    windows,
    result,
  });
  if (stored.status !== "saved") throw new Error(`${fileName}: ${stored.sentence}`);
  return stored.fitId;
}

/** One window that a person set aside, so that the reason and its count can be seen. */
function setOneAside(recording: ScenarioRecording, windows: SavedWindow[]): void {
  if (recording.fileName !== "w01_loose_a.csv") return;
  const third = windows[2];
  if (third) {
    windows[2] = {
      ...third,
      included: false,
      reason: "The participant spoke during this ramp.",
      edited: true,
    };
  }
}

async function handOn(
  desk: Desk,
  actors: Actors,
  fitId: string,
  goal: "submitted" | "approved" | "returned",
): Promise<void> {
  const { db } = desk.store;
  const { labId } = actors.biomechanist;
  queueSecondLook(desk, labId, fitId);
  await background.ended(secondLookKey(fitId));
  let fit = await getFitRow(db, labId, fitId);
  if (fit.state === "draft") {
    const { version } = fit;
    const submitted = await submitFit(desk, actors.biomechanist, { fitId, version });
    if (submitted.status !== "submitted") throw new Error(submitted.sentence);
    fit = await getFitRow(db, labId, fitId);
  }
  if (goal === "submitted" || fit.state !== "submitted") return;
  await openResiduals(desk, actors.reviewer, { fitId });
  const reviewed = await reviewFit(desk, actors.reviewer, {
    fitId,
    version: fit.version,
    decision: goal,
    note:
      goal === "returned"
        ? "The ramps reach 2° and not 4°: the wrong amplitude was set on the rig. Record this block again."
        : "",
  });
  if (reviewed.status !== goal) throw new Error(`The fit could not be ${goal}.`);
}
