import { afterAll, beforeAll, describe, expect, it, vi } from "vitest";
import type { Gate } from "#app/auth/gate.server.ts";
import { loader as known } from "#app/routes/recordings/open-upload.ts";
import { loader as page } from "#app/routes/recordings/take-in.tsx";
import { background } from "#app/workflows/background.server.ts";
import { createStudy } from "#app/workflows/set-up-study.server.ts";
import { openTestLab, type TestLab } from "../support/lab.ts";
import { readyRecording, recordingBytes, setUpStudy, sha256Of } from "../support/study.ts";
import { openTestGate, signInAs, visit } from "../support/visit.ts";

vi.setConfig({ testTimeout: 60_000, hookTimeout: 60_000 });

let lab: TestLab;
let gate: Gate;
let cookie: string;
let studyId: string;
let recordingId: string;

beforeAll(async () => {
  lab = await openTestLab();
  gate = await openTestGate(lab);
  cookie = await signInAs(gate, lab.people.biomechanist.id, lab.lab.id);
  const study = await setUpStudy(lab);
  studyId = study.studyId;
  recordingId = await readyRecording(lab, study, { fileName: "W01_on.csv" });
  await background.settled();
});

afterAll(() => lab.close());

describe("what the take-in page knows of the study", () => {
  const load = () =>
    page(visit(lab, gate, `/studies/${studyId}/take-in`, { id: studyId }, { cookie }));

  it("is the rig's remembered map, with the signs of the side that was taken in", async () => {
    const { study, missing } = await load();
    expect(missing).toEqual([]);
    expect(study.rigMap?.axes[0]?.angle.sign).toMatchObject({ right: expect.any(Number) });
    expect(study.participants.length).toBeGreaterThan(0);
  });

  it("says what the study lacks before a recording can belong anywhere", async () => {
    const made = await createStudy(lab.desk, lab.actor("biomechanist"), {
      name: "Without people",
      rig: { name: "Another rig" },
      axes: [{ name: "FE", label: "flexion–extension", positive: "up", negative: "down" }],
      conditions: [
        { name: "off", level: null, levelUnit: null, isBaseline: true, isActive: false },
      ],
      postures: [{ name: "seated" }],
      participants: [],
    });
    if (made.status !== "created") throw new Error(made.status);
    const { missing } = await page(
      visit(lab, gate, "/studies/x/take-in", { id: made.studyId }, { cookie }),
    );
    expect(missing).toEqual(["participants"]);
  });
});

describe("which bytes the lab has already", () => {
  const ask = async (sha256s: string[], who = cookie) => {
    const query = new URLSearchParams(sha256s.map((sha256) => ["sha256", sha256]));
    const path = `/studies/${studyId}/uploads?${query}`;
    return known(visit(lab, gate, path, { id: studyId }, { cookie: who }));
  };

  it("is told by their hash, with the recording that holds them", async () => {
    const held = sha256Of(recordingBytes());
    const answer: unknown = await (await ask([held, "0".repeat(64)])).json();
    expect(answer).toMatchObject({
      held: [{ sha256: held, recording: { id: recordingId, fileName: "W01_on.csv" } }],
    });
    expect((answer as { held: unknown[] }).held).toHaveLength(1);
  });

  it("is told to nobody of another lab", async () => {
    const outside = await signInAs(gate, lab.outsider.id, lab.otherLab.id);
    await expect(ask([sha256Of(recordingBytes())], outside)).rejects.toMatchObject({ status: 404 });
  });
});
