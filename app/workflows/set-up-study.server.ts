import type { Transaction } from "#app/db/client.server.ts";
import { type EventValue, recordEvent } from "#app/db/events.server.ts";
import {
  findParticipant,
  findParticipantByCode,
  insertParticipants,
  updateParticipant,
} from "#app/db/participants.server.ts";
import { findLatestProtocol, insertProtocol } from "#app/db/protocols.server.ts";
import { findRig, findRigByName, insertRig } from "#app/db/rigs.server.ts";
import {
  findStudy,
  findStudyByName,
  insertConditions,
  insertPostures,
  insertStudy,
  insertStudyAxes,
  listConditions,
  listPostures,
  listStudyAxes,
  type StudyRow,
  updateStudy,
} from "#app/db/studies.server.ts";
import {
  clearOtherBaselines,
  countParts,
  countRecordingsWith,
  deletePart,
  findStudyOfPart,
  nextPosition,
  type StudyPart,
  updateCondition,
} from "#app/db/study-parts.server.ts";
import { canonicalJson } from "#app/domain/canonical-json.ts";
import { defaultChoices, type ProtocolChoices } from "#app/domain/protocol.ts";
import { notFound } from "#app/domain/refusal.ts";
import type { Actor } from "#app/domain/role.ts";
import type {
  NewAxis,
  NewCondition,
  NewParticipant,
  NewPosture,
  StudySetUp,
} from "#app/domain/study.ts";
import type { Desk } from "./desk.server.ts";
import { requireAbility } from "./permission.server.ts";

/** What the form's field does not allow, once the stored rows are known. */
export interface FieldRefusal {
  status: "refused";
  /** Name of the input; null where it is about the whole. */
  field: string | null;
  sentence: string;
}

/** Somebody changed it since the page was loaded. */
export interface StaleSetUp {
  status: "stale";
  sentence: string;
}

const STALE_STUDY: StaleSetUp = {
  status: "stale",
  sentence:
    "This study was changed meanwhile. What stands now is shown, and what you typed is still in its fields: save again to put yours in its place.",
};

// ---------------------------------------------------------------- a whole study

export type CreatedStudy =
  | { status: "created"; studyId: string; protocolId: string }
  | FieldRefusal;

/**
 * Sets up a study with its parts, its rig and the first version of its protocol.
 *
 * @param extra.choices  of the first protocol; left out: the defaults
 * @param extra.origin  said wherever the study's numbers stand, for example "invented"
 */
export async function createStudy(
  desk: Desk,
  actor: Actor,
  input: StudySetUp,
  extra: { choices?: ProtocolChoices; origin?: string } = {},
): Promise<CreatedStudy> {
  requireAbility(actor, "set_up_study");
  const at = desk.clock.now();
  const { newId } = desk.clock;
  return desk.store.write(async (tx) => {
    if (await findStudyByName(tx, actor.labId, input.name)) {
      return {
        status: "refused",
        field: "name",
        sentence: `The lab has a study called ${input.name}: choose another name.`,
      };
    }
    const rigId = await chooseRig(desk, tx, actor, input.rig);
    const studyId = newId();
    await insertStudy(tx, {
      id: studyId,
      labId: actor.labId,
      name: input.name,
      origin: extra.origin ?? null,
      rigId,
      createdAt: at,
    });
    const inOrder = <T extends object>(parts: readonly T[]) =>
      parts.map((part, position) => ({ ...part, id: newId(), studyId, position }));
    await insertStudyAxes(tx, inOrder(input.axes));
    await insertConditions(tx, inOrder(input.conditions));
    await insertPostures(tx, inOrder(input.postures));
    await insertParticipants(
      tx,
      input.participants.map((each) => ({ ...each, id: newId(), studyId, createdAt: at })),
    );
    await note(desk, tx, actor, "study.created", "study", studyId, {
      name: input.name,
      rigId,
      axes: input.axes.map((axis) => axis.name),
      conditions: input.conditions.map((condition) => condition.name),
      postures: input.postures.map((posture) => posture.name),
      participants: input.participants.map((participant) => participant.code),
    });
    const { protocolId } = await insertVersion(desk, tx, actor, {
      studyId,
      number: 1,
      choices: extra.choices ?? defaultChoices,
      note: "First version",
    });
    return { status: "created", studyId, protocolId };
  });
}

export type ChangedStudy = { status: "changed"; version: number } | StaleSetUp | FieldRefusal;

/** Renames a study, or moves it to another rig for the visits to come. */
export async function changeStudy(
  desk: Desk,
  actor: Actor,
  input: { studyId: string; version: number; name: string; rig: StudySetUp["rig"] },
): Promise<ChangedStudy> {
  requireAbility(actor, "set_up_study");
  return desk.store.write(async (tx) => {
    const study = await getStudy(tx, actor, input.studyId);
    if (study.version !== input.version) return STALE_STUDY;
    const same = await findStudyByName(tx, actor.labId, input.name);
    if (same && same.id !== study.id) {
      return {
        status: "refused",
        field: "name",
        sentence: `The lab has a study called ${input.name}: choose another name.`,
      };
    }
    const rigId = await chooseRig(desk, tx, actor, input.rig);
    await updateStudy(tx, study, { name: input.name, rigId });
    await note(desk, tx, actor, "study.changed", "study", study.id, {
      name: input.name,
      rigId,
      before: { name: study.name, rigId: study.rigId },
    });
    return { status: "changed", version: study.version + 1 };
  });
}

async function chooseRig(
  desk: Desk,
  tx: Transaction,
  actor: Actor,
  rig: StudySetUp["rig"],
): Promise<string> {
  if ("id" in rig) {
    const found = await findRig(tx, actor.labId, rig.id);
    if (!found) throw notFound("The lab has no such rig: load the page again.");
    return found.id;
  }
  const found = await findRigByName(tx, actor.labId, rig.name);
  if (found) return found.id;
  const rigId = desk.clock.newId();
  await insertRig(tx, {
    id: rigId,
    labId: actor.labId,
    name: rig.name,
    createdAt: desk.clock.now(),
  });
  await note(desk, tx, actor, "rig.added", "rig", rigId, { name: rig.name });
  return rigId;
}

// ---------------------------------------------------------------- the lists of a study

export type AddedPart =
  | { status: "added"; id: string; version: number }
  | StaleSetUp
  | FieldRefusal;

export type NewPart =
  | { part: "axis"; values: NewAxis }
  | { part: "condition"; values: NewCondition }
  | { part: "posture"; values: NewPosture };

/** Adds an axis, a condition or a posture at the end of its list. `version`: the study's, as seen. */
export async function addPart(
  desk: Desk,
  actor: Actor,
  input: { studyId: string; version: number } & NewPart,
): Promise<AddedPart> {
  requireAbility(actor, "set_up_study");
  return desk.store.write(async (tx) => {
    const study = await getStudy(tx, actor, input.studyId);
    if (study.version !== input.version) return STALE_STUDY;
    const taken = await nameTaken(tx, study.id, input.part, input.values.name, null);
    if (taken) return taken;
    const id = desk.clock.newId();
    const position = await nextPosition(tx, input.part, study.id);
    const place = { id, studyId: study.id, position };
    switch (input.part) {
      case "axis":
        await insertStudyAxes(tx, [{ ...place, ...input.values }]);
        break;
      case "condition":
        await insertConditions(tx, [{ ...place, ...input.values }]);
        if (input.values.isBaseline) await clearOtherBaselines(tx, study.id, id);
        break;
      case "posture":
        await insertPostures(tx, [{ ...place, ...input.values }]);
        break;
    }
    await updateStudy(tx, study, {});
    await note(desk, tx, actor, `${input.part}.added`, input.part, id, {
      studyId: study.id,
      ...input.values,
    });
    return { status: "added", id, version: study.version + 1 };
  });
}

/** Changes a condition; where it becomes the baseline, the one before it no longer is. */
export async function changeCondition(
  desk: Desk,
  actor: Actor,
  input: { studyId: string; conditionId: string; version: number; values: NewCondition },
): Promise<ChangedStudy> {
  requireAbility(actor, "set_up_study");
  const { studyId } = input;
  return desk.store.write(async (tx) => {
    const study = await getStudyWith(tx, actor, studyId, "condition", input.conditionId);
    if (study.version !== input.version) return STALE_STUDY;
    const { values } = input;
    const taken = await nameTaken(tx, study.id, "condition", values.name, input.conditionId);
    if (taken) return taken;
    await updateCondition(tx, input.conditionId, values);
    if (values.isBaseline) await clearOtherBaselines(tx, study.id, input.conditionId);
    await updateStudy(tx, study, {});
    await note(desk, tx, actor, "condition.changed", "condition", input.conditionId, {
      studyId,
      ...values,
    });
    return { status: "changed", version: study.version + 1 };
  });
}

export type RemovedPart = { status: "removed"; version: number } | StaleSetUp | FieldRefusal;

const PART_WORDS = {
  axis: "axis",
  condition: "condition",
  posture: "posture",
  participant: "participant",
} as const satisfies Record<StudyPart, string>;

/** Removes a part that no recording rests on; the last axis, condition or posture stays. */
export async function removePart(
  desk: Desk,
  actor: Actor,
  input: { studyId: string; part: StudyPart; id: string; version: number },
): Promise<RemovedPart> {
  requireAbility(actor, "set_up_study");
  const { studyId, part, id } = input;
  return desk.store.write(async (tx) => {
    const study = await getStudyWith(tx, actor, studyId, part, id);
    if (study.version !== input.version) return STALE_STUDY;
    const count = await countRecordingsWith(tx, part, id);
    if (count > 0) {
      return {
        status: "refused",
        field: null,
        sentence: `${count === 1 ? "One recording rests" : `${count} recordings rest`} on this ${PART_WORDS[part]}, so it stays.`,
      };
    }
    if (part !== "participant" && (await countParts(tx, part, studyId)) === 1) {
      return {
        status: "refused",
        field: null,
        sentence: `A study has at least one ${PART_WORDS[part]}: add another before you remove this one.`,
      };
    }
    await deletePart(tx, part, id);
    await updateStudy(tx, study, {});
    await note(desk, tx, actor, `${part}.removed`, part, id, { studyId });
    return { status: "removed", version: study.version + 1 };
  });
}

async function nameTaken(
  tx: Transaction,
  studyId: string,
  part: "axis" | "condition" | "posture",
  name: string,
  exceptId: string | null,
): Promise<FieldRefusal | null> {
  const lists = { axis: listStudyAxes, condition: listConditions, posture: listPostures } as const;
  const rows: { id: string; name: string }[] = await lists[part](tx, studyId);
  if (!rows.some((row) => row.name === name && row.id !== exceptId)) return null;
  return {
    status: "refused",
    field: "name",
    sentence: `The study has the ${PART_WORDS[part]} ${name} already: choose another name.`,
  };
}

// ---------------------------------------------------------------- participants

export type AddedParticipant = { status: "added"; participantId: string } | FieldRefusal;

export async function addParticipant(
  desk: Desk,
  actor: Actor,
  input: { studyId: string; values: NewParticipant },
): Promise<AddedParticipant> {
  requireAbility(actor, "set_up_study");
  const { values } = input;
  return desk.store.write(async (tx) => {
    const study = await getStudy(tx, actor, input.studyId);
    if (await findParticipantByCode(tx, study.id, values.code)) return codeTaken(values.code);
    const participantId = desk.clock.newId();
    const createdAt = desk.clock.now();
    await insertParticipants(tx, [{ ...values, id: participantId, studyId: study.id, createdAt }]);
    await note(desk, tx, actor, "participant.added", "participant", participantId, {
      studyId: study.id,
      ...values,
    });
    return { status: "added", participantId };
  });
}

export type ChangedParticipant = { status: "changed"; version: number } | StaleSetUp | FieldRefusal;

/** `version`: the participant's, as seen. The tested side stays once a recording's signs rest on it. */
export async function changeParticipant(
  desk: Desk,
  actor: Actor,
  input: { studyId: string; participantId: string; version: number; values: NewParticipant },
): Promise<ChangedParticipant> {
  requireAbility(actor, "set_up_study");
  const { values } = input;
  return desk.store.write(async (tx) => {
    const participant = await findParticipant(tx, actor.labId, input.participantId);
    if (participant?.studyId !== input.studyId) throw notFound();
    if (participant.version !== input.version) {
      return {
        status: "stale",
        sentence: `${participant.code} was changed meanwhile. What stands now is shown, and what you typed is still in its fields: save again to put yours in its place.`,
      };
    }
    const same = await findParticipantByCode(tx, participant.studyId, values.code);
    if (same && same.id !== participant.id) return codeTaken(values.code);
    if (values.testedSide !== participant.testedSide) {
      const count = await countRecordingsWith(tx, "participant", participant.id);
      if (count > 0) {
        return {
          status: "refused",
          field: "testedSide",
          sentence: `Recordings of ${participant.code} were taken in with the ${participant.testedSide} side, and their signs rest on it: the side stays.`,
        };
      }
    }
    await updateParticipant(tx, participant, values);
    await note(desk, tx, actor, "participant.changed", "participant", participant.id, {
      studyId: participant.studyId,
      ...values,
    });
    return { status: "changed", version: participant.version + 1 };
  });
}

function codeTaken(code: string): FieldRefusal {
  return {
    status: "refused",
    field: "code",
    sentence: `The study has a participant ${code} already: choose another code.`,
  };
}

// ---------------------------------------------------------------- protocols

export type AddedProtocol =
  | { status: "added"; protocolId: string; number: number }
  /** The newest version says the same. */
  | { status: "unchanged"; number: number }
  | { status: "stale"; sentence: string; latest: { id: string; number: number } };

/** Adds a version; those before it stay as they are, since fits rest on them. */
export async function addProtocol(
  desk: Desk,
  actor: Actor,
  input: {
    studyId: string;
    /** The newest version when the form was opened. */
    basedOnProtocolId: string | null;
    choices: ProtocolChoices;
    note: string;
  },
): Promise<AddedProtocol> {
  requireAbility(actor, "set_up_study");
  return desk.store.write(async (tx) => {
    const study = await getStudy(tx, actor, input.studyId);
    const latest = await findLatestProtocol(tx, study.id);
    if (latest && latest.id !== input.basedOnProtocolId) {
      return {
        status: "stale",
        sentence: `Version ${latest.number} was added meanwhile: look at it first, then add yours.`,
        latest: { id: latest.id, number: latest.number },
      };
    }
    if (latest?.choices === canonicalJson(input.choices)) {
      return { status: "unchanged", number: latest.number };
    }
    const number = (latest?.number ?? 0) + 1;
    const { protocolId } = await insertVersion(desk, tx, actor, {
      studyId: study.id,
      number,
      choices: input.choices,
      note: input.note.trim(),
    });
    return { status: "added", protocolId, number };
  });
}

async function insertVersion(
  desk: Desk,
  tx: Transaction,
  actor: Actor,
  version: { studyId: string; number: number; choices: ProtocolChoices; note: string },
): Promise<{ protocolId: string }> {
  const protocolId = desk.clock.newId();
  await insertProtocol(tx, {
    id: protocolId,
    studyId: version.studyId,
    number: version.number,
    kind: "transient",
    choices: canonicalJson(version.choices),
    note: version.note,
    createdBy: actor.personId,
    createdAt: desk.clock.now(),
  });
  await note(desk, tx, actor, "protocol.added", "protocol", protocolId, {
    studyId: version.studyId,
    number: version.number,
    note: version.note,
  });
  return { protocolId };
}

// ---------------------------------------------------------------- shared by all of them

async function getStudy(tx: Transaction, actor: Actor, studyId: string): Promise<StudyRow> {
  const study = await findStudy(tx, actor.labId, studyId);
  if (!study) throw notFound();
  return study;
}

/** The study that this part stands in: a part of another one is not there. */
async function getStudyWith(
  tx: Transaction,
  actor: Actor,
  studyId: string,
  part: StudyPart,
  id: string,
): Promise<StudyRow> {
  if ((await findStudyOfPart(tx, actor.labId, part, id)) !== studyId) throw notFound();
  return getStudy(tx, actor, studyId);
}

function note(
  desk: Desk,
  tx: Transaction,
  actor: Actor,
  kind: string,
  objectType: string,
  objectId: string,
  detail: { [key: string]: EventValue },
): Promise<void> {
  return recordEvent(tx, {
    at: desk.clock.now(),
    labId: actor.labId,
    personId: actor.personId,
    kind,
    objectType,
    objectId,
    detail,
  });
}
