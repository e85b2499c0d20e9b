import { afterEach, beforeEach, describe, expect, it } from "vitest";
import { listEvents, verifyChain } from "#app/db/events.server.ts";
import { listParticipants } from "#app/db/participants.server.ts";
import { listProtocols } from "#app/db/protocols.server.ts";
import { listRigs } from "#app/db/rigs.server.ts";
import { findStudyPlan, listStudies } from "#app/db/studies.server.ts";
import { defaultChoices } from "#app/domain/protocol.ts";
import { studySetUpSchema } from "#app/domain/study.ts";
import {
  addPart,
  addParticipant,
  addProtocol,
  changeCondition,
  changeParticipant,
  changeStudy,
  createStudy,
  removePart,
} from "#app/workflows/set-up-study.server.ts";
import { openTestLab, type TestLab } from "../support/lab.ts";
import { setUp, setUpStudy } from "../support/study.ts";

let lab: TestLab;
beforeEach(async () => {
  lab = await openTestLab();
});
afterEach(() => lab.close());

const eventKinds = async () =>
  (await listEvents(lab.store.db, lab.lab.id)).map((event) => event.kind).reverse();

describe("setting a study up", () => {
  it("makes its parts in their order, its rig and the first protocol version, with their events", async () => {
    const study = await setUpStudy(lab);
    const plan = await findStudyPlan(lab.store.db, lab.lab.id, study.studyId);
    expect(plan?.rig?.name).toBe("Two-axis wrist rig");
    expect(plan?.axes.map((axis) => axis.name)).toEqual(["FE", "RUD"]);
    expect(plan?.conditions.map((condition) => condition.name)).toEqual(["Off", "On"]);
    const [version] = await listProtocols(lab.store.db, study.studyId);
    expect(version).toMatchObject({ number: 1, createdByName: "The biomechanist" });
    expect(JSON.parse(version?.choices ?? "")).toEqual(JSON.parse(JSON.stringify(defaultChoices)));
    expect(await eventKinds()).toEqual(["rig.added", "study.created", "protocol.added"]);
    expect(await verifyChain(lab.store.db)).toMatchObject({ status: "whole" });
  });

  it("refuses a name that the lab's other study has", async () => {
    await setUpStudy(lab);
    const again = await createStudy(lab.desk, lab.actor("manager"), setUp);
    expect(again).toMatchObject({ status: "refused", field: "name" });
    expect(await listStudies(lab.store.db, lab.lab.id)).toHaveLength(1);
  });

  it("uses the lab's rig of that name, and not another lab's", async () => {
    await setUpStudy(lab);
    await setUpStudy(lab, { ...setUp, name: "Second study" });
    expect(await listRigs(lab.store.db, lab.lab.id)).toHaveLength(1);
    const [rig] = await listRigs(lab.store.db, lab.lab.id);
    await expect(
      createStudy(lab.desk, lab.outsideActor, { ...setUp, rig: { id: rig?.id ?? "" } }),
    ).rejects.toMatchObject({ status: 404 });
  });

  it.each(["analyst", "reviewer"] as const)("is not for the role %s", async (role) => {
    await expect(createStudy(lab.desk, lab.actor(role), setUp)).rejects.toMatchObject({
      status: 403,
    });
  });

  it("leaves nothing behind where its event cannot be written", async () => {
    // The person does not exist, so the event's reference to them fails at the end.
    const stranger = { ...lab.actor("biomechanist"), personId: "nobody" };
    await expect(createStudy(lab.desk, stranger, setUp)).rejects.toThrow();
    expect(await listStudies(lab.store.db, lab.lab.id)).toEqual([]);
    expect(await listRigs(lab.store.db, lab.lab.id)).toEqual([]);
    expect(await eventKinds()).toEqual([]);
  });

  it.each([
    [{ conditions: [setUp.conditions[0], setUp.conditions[0]] }, "Two conditions are called Off."],
    [{ axes: [] }, "A study has at least one axis."],
    [
      { participants: [{ ...setUp.participants[0], code: "Anna Example" }] },
      "A participant's code has up to 20 letters and digits, without spaces, for example W07.",
    ],
    [
      {
        conditions: setUp.conditions.map((condition) => ({ ...condition, isBaseline: true })),
      },
      "Only one condition can be the baseline.",
    ],
    [
      { conditions: [{ ...setUp.conditions[0], level: 3, levelUnit: null }] },
      "A level and its unit come together: give both or neither.",
    ],
  ])("says what does not fit: %#", (change, sentence) => {
    const read = studySetUpSchema.safeParse({ ...setUp, ...change });
    expect(read.error?.issues.map((issue) => issue.message)).toContain(sentence);
  });
});

describe("changing a study", () => {
  it("renames it once for those who saw it as it is", async () => {
    const { studyId } = await setUpStudy(lab);
    const rename = { studyId, version: 1, rig: { name: "Two-axis wrist rig" } };
    const first = await changeStudy(lab.desk, lab.actor("manager"), { ...rename, name: "Brace" });
    const late = await changeStudy(lab.desk, lab.actor("biomechanist"), { ...rename, name: "X" });
    expect(first).toEqual({ status: "changed", version: 2 });
    expect(late.status).toBe("stale");
    expect((await listStudies(lab.store.db, lab.lab.id))[0]?.name).toBe("Brace");
  });

  it("adds a condition at the end, and the newest baseline is the only one", async () => {
    const { studyId, conditionIds } = await setUpStudy(lab);
    const values = {
      name: "Brace",
      level: null,
      levelUnit: null,
      isBaseline: true,
      isActive: true,
    };
    const added = await addPart(lab.desk, lab.actor("biomechanist"), {
      studyId,
      version: 1,
      part: "condition",
      values,
    });
    expect(added).toMatchObject({ status: "added", version: 2 });
    const baselines = async () =>
      (await findStudyPlan(lab.store.db, lab.lab.id, studyId))?.conditions
        .filter((condition) => condition.isBaseline)
        .map((condition) => condition.name);
    expect(await baselines()).toEqual(["Brace"]);
    const back = { name: "Off", level: 0, levelUnit: "kPa", isBaseline: true, isActive: false };
    const change = { studyId, conditionId: conditionIds[0] ?? "", values: back };
    const stale = await changeCondition(lab.desk, lab.actor("biomechanist"), {
      ...change,
      version: 1,
    });
    expect(stale.status).toBe("stale");
    await changeCondition(lab.desk, lab.actor("biomechanist"), { ...change, version: 2 });
    expect(await baselines()).toEqual(["Off"]);
  });

  it("refuses a second part of the same name", async () => {
    const { studyId } = await setUpStudy(lab);
    const again = await addPart(lab.desk, lab.actor("biomechanist"), {
      studyId,
      version: 1,
      part: "posture",
      values: { name: "Neutral" },
    });
    expect(again).toMatchObject({ status: "refused", field: "name" });
  });

  it("removes a part that nothing rests on, but never the last one", async () => {
    const { studyId, conditionIds, postureId } = await setUpStudy(lab);
    const remove = (part: "condition" | "posture", id: string, version: number) =>
      removePart(lab.desk, lab.actor("biomechanist"), { studyId, part, id, version });
    expect(await remove("posture", postureId, 1)).toMatchObject({ status: "refused" });
    expect(await remove("condition", conditionIds[1] ?? "", 1)).toEqual({
      status: "removed",
      version: 2,
    });
    const plan = await findStudyPlan(lab.store.db, lab.lab.id, studyId);
    expect(plan?.conditions.map((condition) => condition.name)).toEqual(["Off"]);
  });

  it("does not exist for another lab", async () => {
    const { studyId, conditionIds, participantIds } = await setUpStudy(lab);
    const outside = lab.outsideActor;
    const missing = { status: 404 };
    const rig = { name: "Rig" };
    const values = { name: "A", level: null, levelUnit: null, isBaseline: false, isActive: false };
    const person = { code: "W09", testedSide: "left", bodyMassKg: null, heightM: null } as const;
    const tries = [
      changeStudy(lab.desk, outside, { studyId, version: 1, name: "A", rig }),
      addPart(lab.desk, outside, { studyId, version: 1, part: "posture", values: { name: "A" } }),
      changeCondition(lab.desk, outside, {
        studyId,
        conditionId: conditionIds[0] ?? "",
        version: 1,
        values,
      }),
      removePart(lab.desk, outside, {
        studyId,
        part: "condition",
        id: conditionIds[0] ?? "",
        version: 1,
      }),
      addParticipant(lab.desk, outside, { studyId, values: person }),
      changeParticipant(lab.desk, outside, {
        studyId,
        participantId: participantIds[0] ?? "",
        version: 1,
        values: person,
      }),
      addProtocol(lab.desk, outside, {
        studyId,
        basedOnProtocolId: null,
        choices: defaultChoices,
        note: "",
      }),
    ];
    for (const each of tries) await expect(each).rejects.toMatchObject(missing);
  });

  it("does not reach the parts of another study of the lab", async () => {
    const { conditionIds, participantIds } = await setUpStudy(lab);
    const { studyId } = await setUpStudy(lab, { ...setUp, name: "Second study" });
    const seen = { studyId, version: 1 };
    const values = { name: "A", level: null, levelUnit: null, isBaseline: true, isActive: false };
    const person = { code: "W09", testedSide: "left", bodyMassKg: null, heightM: null } as const;
    const [conditionId = "", id = ""] = conditionIds;
    const participantId = participantIds[0] ?? "";
    const tries = [
      changeCondition(lab.desk, lab.actor("manager"), { ...seen, conditionId, values }),
      removePart(lab.desk, lab.actor("manager"), { ...seen, part: "condition", id }),
      changeParticipant(lab.desk, lab.actor("manager"), {
        ...seen,
        participantId,
        values: person,
      }),
    ];
    for (const each of tries) await expect(each).rejects.toMatchObject({ status: 404 });
  });
});

describe("participants", () => {
  it("are added and changed by code, with the version that was seen", async () => {
    const { studyId } = await setUpStudy(lab);
    const values = { code: "W03", testedSide: "left", bodyMassKg: 61, heightM: null } as const;
    const added = await addParticipant(lab.desk, lab.actor("biomechanist"), { studyId, values });
    if (added.status !== "added") throw new Error(added.sentence);
    const { participantId } = added;
    const change = (version: number, bodyMassKg: number) =>
      changeParticipant(lab.desk, lab.actor("manager"), {
        studyId,
        participantId,
        version,
        values: { ...values, bodyMassKg },
      });
    expect(await change(1, 62)).toEqual({ status: "changed", version: 2 });
    expect(await change(1, 63)).toMatchObject({ status: "stale" });
    const rows = await listParticipants(lab.store.db, studyId);
    expect(rows.find((row) => row.code === "W03")?.bodyMassKg).toBe(62);
    const taken = await addParticipant(lab.desk, lab.actor("biomechanist"), { studyId, values });
    expect(taken).toMatchObject({ status: "refused", field: "code" });
  });
});

describe("protocol versions", () => {
  it("are added in sequence, and none is changed", async () => {
    const { studyId, protocolId } = await setUpStudy(lab);
    const choices = { ...defaultChoices, lag_ms: 4 };
    const added = await addProtocol(lab.desk, lab.actor("manager"), {
      studyId,
      basedOnProtocolId: protocolId,
      choices,
      note: " The torque is late ",
    });
    expect(added).toMatchObject({ status: "added", number: 2 });
    const versions = await listProtocols(lab.store.db, studyId);
    expect(versions.map((version) => version.number)).toEqual([2, 1]);
    expect(versions[0]).toMatchObject({ note: "The torque is late", createdByName: "The manager" });
    expect(JSON.parse(versions[1]?.choices ?? "").lag_ms).toBe(0);
  });

  it("are not added over one that the person has not seen, nor twice with the same choices", async () => {
    const { studyId, protocolId } = await setUpStudy(lab);
    const add = (basedOnProtocolId: string, lag_ms: number) =>
      addProtocol(lab.desk, lab.actor("biomechanist"), {
        studyId,
        basedOnProtocolId,
        choices: { ...defaultChoices, lag_ms },
        note: "",
      });
    expect(await add(protocolId, 0)).toEqual({ status: "unchanged", number: 1 });
    const second = await add(protocolId, 2);
    if (second.status !== "added") throw new Error(second.status);
    expect(await add(protocolId, 3)).toMatchObject({
      status: "stale",
      latest: { id: second.protocolId, number: 2 },
    });
  });
});
