import { afterAll, afterEach, beforeEach, describe, expect, it, vi } from "vitest";
import { listEvents } from "#app/db/events.server.ts";
import { findRig, listRigs } from "#app/db/rigs.server.ts";
import { compileProtocol, defaultChoices } from "#app/domain/protocol.ts";
import type { Actor } from "#app/domain/role.ts";
import { background } from "#app/workflows/background.server.ts";
import { measureRig } from "#app/workflows/measure-rig.server.ts";
import { settleSoon } from "#app/workflows/take-in-recording.server.ts";
import { openTestLab, type TestLab } from "../support/lab.ts";
import {
  map,
  recordingBytes,
  setUp,
  setUpStudy,
  sha256Of,
  type TestStudy,
  takeIn,
} from "../support/study.ts";

// The engine's thread starts in the first test that needs it: seconds on a busy machine.
vi.setConfig({ testTimeout: 60_000, hookTimeout: 60_000 });

let lab: TestLab;
let study: TestStudy;
let rigId: string;
beforeEach(async () => {
  lab = await openTestLab();
  study = await setUpStudy(lab);
  rigId = (await listRigs(lab.store.db, lab.lab.id))[0]?.id ?? "";
});
afterEach(async () => {
  await background.settled();
  lab.close();
});
afterAll(() => background.close());

// Light and soft, as a handle without a limb.
const bytes = recordingBytes({ K: 0.2, B: 0.01, I: 0.001 });

function measure(actor: Actor = lab.actor("manager"), file = bytes) {
  const { protocol } = compileProtocol({
    choices: defaultChoices,
    map,
    axes: setUp.axes,
    geometry: {},
    rig: null,
  });
  return measureRig(lab.desk, actor, { rigId, fileName: "empty.csv", bytes: file, protocol });
}

describe("measuring a rig without a limb", () => {
  it("keeps the rig's own K, B and I, the raw bytes, and who measured it", async () => {
    const measured = await measure();
    if (measured.status !== "measured") throw new Error(measured.sentence);
    expect(measured.impedance.FE?.I).toBeCloseTo(0.001, 4);
    const { K, B, I } = measured.impedance.FE ?? {};
    const rig = await findRig(lab.store.db, lab.lab.id, rigId);
    expect(JSON.parse(rig?.impedance ?? "")).toEqual({ FE: { K, B, I } });
    const [event] = await listEvents(lab.store.db, lab.lab.id, { kind: "rig.measured" });
    expect(event).toMatchObject({ personId: lab.people.manager.id, objectId: rigId });
    const { storageKey } = JSON.parse(event?.detail ?? "");
    expect(sha256Of(await lab.desk.storage.read(storageKey))).toBe(sha256Of(bytes));
  });

  it("keeps the raw bytes where the same file is refused as a recording", async () => {
    await measure();
    const before = [...lab.desk.storage.objects.keys()];
    expect(before).toHaveLength(1);
    const [axis] = map.axes;
    if (!axis) throw new Error("The map has no axis.");
    const wrong = { ...map, axes: [{ ...axis, angle: { ...axis.angle, column: "none" } }] };
    const taken = await takeIn(lab, study, { bytes, map: wrong });
    expect((await settleSoon(lab.desk, lab.actor("biomechanist"), taken)).status).toBe("refused");
    expect([...lab.desk.storage.objects.keys()]).toEqual(before);
  });

  it("says what is wrong with a file that cannot be read, and keeps nothing of it", async () => {
    const text = new TextDecoder().decode(bytes).split("\n");
    text[9] = "16,x,0";
    const bad = new TextEncoder().encode(text.join("\n"));
    const refused = await measure(lab.actor("manager"), bad);
    if (refused.status !== "refused") throw new Error(refused.status);
    expect(refused.sentence).toMatch(/^empty\.csv, line 10: /);
    expect(lab.desk.storage.objects.size).toBe(0);
  });

  it("is for the manager of the rig's lab", async () => {
    await expect(measure(lab.actor("biomechanist"))).rejects.toMatchObject({ status: 403 });
    await expect(measure(lab.outsideActor)).rejects.toMatchObject({ status: 404 });
  });
});
