import { afterAll, afterEach, beforeEach, describe, expect, it, vi } from "vitest";
import { listEvents, verifyChain } from "#app/db/events.server.ts";
import {
  getFit,
  getRecordingForPerson,
  listCurrentFits,
  listFits,
  updateVerification,
} from "#app/db/fits.server.ts";
import { listSubmitted } from "#app/db/reviews.server.ts";
import { recordings } from "#app/db/schema.ts";
import type { SavedWindow } from "#app/domain/fit.ts";
import { defaultChoices, parseProtocol } from "#app/domain/protocol.ts";
import type { Actor } from "#app/domain/role.ts";
import * as recordingPage from "#app/routes/recordings/recording.tsx";
import { background } from "#app/workflows/background.server.ts";
import {
  noteFitDownloaded,
  noteRecordingDownloaded,
  noteRecordingOpened,
} from "#app/workflows/note-opening.server.ts";
import { resumeWork } from "#app/workflows/resume-work.server.ts";
import { openResiduals, reviewFit } from "#app/workflows/review-fit.server.ts";
import { addProtocol } from "#app/workflows/set-up-study.server.ts";
import { storeFit } from "#app/workflows/store-fit.server.ts";
import { participantValues } from "#app/workflows/study-values.server.ts";
import { submitFit } from "#app/workflows/submit-fit.server.ts";
import { openTestLab, type TestLab } from "../support/lab.ts";
import {
  fitOf,
  readyRecording,
  recordingBytes,
  setUp,
  setUpStudy,
  sha256Of,
  type TestStudy,
} from "../support/study.ts";
import { openTestGate, signInAs, visit } from "../support/visit.ts";

// The engine's thread starts in the first test that needs it: seconds on a busy machine.
vi.setConfig({ testTimeout: 60_000, hookTimeout: 60_000 });

let lab: TestLab;
let study: TestStudy;
let recordingId: string;
beforeEach(async () => {
  lab = await openTestLab();
  study = await setUpStudy(lab);
  recordingId = await readyRecording(lab, study);
});
afterEach(async () => {
  await background.settled();
  lab.close();
});
afterAll(() => background.close());

const person = () => lab.actor("biomechanist");
const lastEvent = async (kind: string) => (await listEvents(lab.store.db, lab.lab.id, { kind }))[0];

async function saved(
  change?: (windows: SavedWindow[]) => SavedWindow[],
  actor: Actor = person(),
): Promise<string> {
  const stored = await storeFit(lab.desk, actor, await fitOf(lab, recordingId, change));
  if (stored.status !== "saved") throw new Error(JSON.stringify(stored));
  await background.settled();
  return stored.fitId;
}

async function submitted(): Promise<string> {
  const fitId = await saved();
  const answer = await submitFit(lab.desk, person(), { fitId, version: 1 });
  expect(answer).toEqual({ status: "submitted", version: 2 });
  return fitId;
}

const setAsideFirst = (windows: SavedWindow[]) =>
  windows.map((window, index) =>
    index === 0 ? { ...window, included: false, reason: "The limb slipped", edited: true } : window,
  );

describe("saving a fit", () => {
  it("keeps windows, result and the PROTOCOL that the server compiled, and computes them again", async () => {
    const input = await fitOf(lab, recordingId);
    expect(input.windows.length).toBe(6);
    const stored = await storeFit(lab.desk, person(), input);
    if (stored.status !== "saved") throw new Error(JSON.stringify(stored));
    await background.settled();
    const seen = await getFit(lab.store.db, lab.lab.id, stored.fitId);
    expect(seen.fit).toMatchObject({
      number: 1,
      state: "draft",
      verification: "verified",
      verificationNote: null,
      savedByName: "The biomechanist",
      supersededAt: null,
    });
    expect(seen.fit.result).toEqual(input.result);
    expect(seen.fit.windows.map((window) => window.onset_s)).toEqual(
      input.windows.map((window) => window.onset_s),
    );
    expect(seen.fit.windows.every((window) => window.editedById === null)).toBe(true);
    expect(seen.fit.protocolSha256).toBe(sha256Of(new TextEncoder().encode(seen.protocolDocument)));
    expect(parseProtocol(seen.protocolDocument).axes[0]).toMatchObject({
      name: "FE",
      positive: "extension",
    });
    expect((await lastEvent("fit.saved"))?.objectId).toBe(stored.fitId);
    expect(await lastEvent("fit.verified")).toMatchObject({
      objectId: stored.fitId,
      personId: null,
    });
    expect(await verifyChain(lab.store.db)).toMatchObject({ status: "whole" });
  });

  it("finds the joint that the recording was made of", async () => {
    // Closed form: K grows from 2 N·m/rad by 1 % a movement; B and I are constant.
    const { fit } = await getFit(lab.store.db, lab.lab.id, await saved());
    const extension = fit.result.pooled.find((pooled) => pooled.direction === "extension");
    expect(extension?.K.window_mean).toBeCloseTo(2 * 1.03, 1);
    expect(extension?.windows).toBe(3);
  });

  it("puts the new fit in the place of the current one, which stays in the history", async () => {
    const first = await saved();
    const second = await saved(setAsideFirst);
    const history = await listFits(lab.store.db, recordingId);
    expect(history.map((fit) => [fit.number, fit.id, fit.supersededBy])).toEqual([
      [2, second, null],
      [1, first, second],
    ]);
    const seen = await getRecordingForPerson(lab.store.db, lab.lab.id, recordingId);
    expect(seen.current?.id).toBe(second);
    expect(seen.current?.windows[0]).toMatchObject({
      included: false,
      reason: "The limb slipped",
      editedByName: "The biomechanist",
    });
    expect(seen.current?.windows[1]?.editedById).toBeNull();
    expect(JSON.parse((await lastEvent("fit.saved"))?.detail ?? "")).toMatchObject({
      supersededFitId: first,
      supersededState: "draft",
      setAside: 1,
    });
  });

  it("keeps who set a window aside, and when, for as long as the window stays as it is", async () => {
    await saved(setAsideFirst);
    const before = lab.desk.clock.now();
    lab.desk.clock.advance(60_000);
    const colleague: Actor = { ...lab.actor("analyst"), roles: ["biomechanist"] };
    await saved(
      (windows) =>
        setAsideFirst(windows).map((window, index) =>
          index === 1
            ? { ...window, window_ms: [0, 90] as [number, number], edited: true }
            : window,
        ),
      colleague,
    );
    const seen = await getRecordingForPerson(lab.store.db, lab.lab.id, recordingId);
    expect(
      seen.current?.windows.slice(0, 3).map(({ editedById, editedAt }) => [editedById, editedAt]),
    ).toEqual([
      [person().personId, before],
      [colleague.personId, before + 60_000],
      [null, null],
    ]);
  });

  it("hands both back where somebody saved in between, and stores neither over the other", async () => {
    const mine = await fitOf(lab, recordingId);
    const theirs = await saved(setAsideFirst);
    const answer = await storeFit(lab.desk, person(), mine);
    if (answer.status !== "stale") throw new Error(answer.status);
    expect(answer.current).toMatchObject({ id: theirs, savedByName: "The biomechanist" });
    expect(answer.current.windows[0]?.included).toBe(false);
    expect(answer.current.pooled.length).toBeGreaterThan(0);
    expect(answer.mine).toEqual({ windows: mine.windows, pooled: mine.result.pooled });
    expect(await listFits(lab.store.db, recordingId)).toHaveLength(1);

    const again = await storeFit(lab.desk, person(), { ...mine, basedOnFitId: theirs });
    expect(again).toMatchObject({ status: "saved", number: 2 });
  });

  it("lets two saves at once become one fit and one stale answer", async () => {
    const input = await fitOf(lab, recordingId);
    const answers = await Promise.all([
      storeFit(lab.desk, person(), input),
      storeFit(lab.desk, person(), input),
    ]);
    expect(answers.map((answer) => answer.status).sort()).toEqual(["saved", "stale"]);
  });

  it("asks to fit again where the PROTOCOL is another by now, and says which", async () => {
    const input = await fitOf(lab, recordingId);
    const result = { ...input.result, protocol_sha256: "0".repeat(64) };
    const answer = await storeFit(lab.desk, person(), { ...input, result });
    expect(answer).toMatchObject({
      status: "outdated",
      protocolSha256: input.result.protocol_sha256,
    });
  });

  it("refuses what is no fit of this recording", async () => {
    const input = await fitOf(lab, recordingId);
    const [first] = input.windows;
    if (!first) throw new Error("No window was found.");
    const tries = [
      { ...input, windows: [] },
      { ...input, windows: [...input.windows, first] },
      { ...input, windows: input.windows.map((window) => ({ ...window, axis: "PS" })) },
      { ...input, windows: input.windows.slice(1) },
      { ...input, result: { ...input.result, recordings: [] } },
    ];
    for (const each of tries) {
      expect(await storeFit(lab.desk, person(), each)).toMatchObject({ status: "refused" });
    }
    expect(await listFits(lab.store.db, recordingId)).toEqual([]);
  });

  it("refuses a recording that is not ready", async () => {
    const input = await fitOf(lab, recordingId);
    await lab.store.write(
      async (tx) => void (await tx.update(recordings).set({ state: "verifying" })),
    );
    expect(await storeFit(lab.desk, person(), input)).toEqual({
      status: "refused",
      sentence: "W01_off.csv is not ready yet: wait until its stored copy is verified.",
    });
  });

  it("is for the biomechanist, and for recordings and protocols of their lab's study", async () => {
    const input = await fitOf(lab, recordingId);
    for (const role of ["analyst", "reviewer", "manager"] as const) {
      await expect(storeFit(lab.desk, lab.actor(role), input)).rejects.toMatchObject({
        status: 403,
      });
    }
    await expect(storeFit(lab.desk, lab.outsideActor, input)).rejects.toMatchObject({
      status: 404,
    });
    const other = await setUpStudy(lab, { ...setUp, name: "B" });
    await expect(
      storeFit(lab.desk, person(), { ...input, protocolId: other.protocolId }),
    ).rejects.toMatchObject({ status: 404 });
  });

  it("stores nothing where its event cannot be written", async () => {
    await saved();
    const input = await fitOf(lab, recordingId);
    // The person does not exist, so the references to them fail after the fit was superseded.
    const stranger = { ...person(), personId: "nobody" };
    await expect(storeFit(lab.desk, stranger, input)).rejects.toThrow();
    const [only, ...others] = await listFits(lab.store.db, recordingId);
    expect(only).toMatchObject({ number: 1, supersededAt: null, version: 1 });
    expect(others).toEqual([]);
  });
});

describe("the server's second look", () => {
  it("marks a number that was changed on its way, and says where and by how much", async () => {
    const input = await fitOf(lab, recordingId);
    const [first, ...rest] = input.result.windows;
    if (!first?.K) throw new Error("The first window has no K.");
    const windows = [{ ...first, K: first.K * (1 + 1e-9) }, ...rest];
    const stored = await storeFit(lab.desk, person(), {
      ...input,
      result: { ...input.result, windows },
    });
    if (stored.status !== "saved") throw new Error(stored.status);
    await background.settled();
    const { fit } = await getFit(lab.store.db, lab.lab.id, stored.fitId);
    expect(fit.verification).toBe("differs");
    expect(fit.verificationNote).toMatch(/^windows\[0\]\.K was saved as .* 1\.0e-9 of it apart\.$/);
    expect((await lastEvent("fit.differs"))?.objectId).toBe(stored.fitId);
    const answer = await submitFit(lab.desk, person(), { fitId: stored.fitId, version: 1 });
    expect(answer).toMatchObject({ status: "not_verified", verification: "differs" });
  });

  it("marks a stored file that is no longer what was taken in", async () => {
    const input = await fitOf(lab, recordingId);
    const key = `raw/${lab.lab.id}/${sha256Of(recordingBytes())}`;
    const bytes = lab.desk.storage.objects.get(key);
    if (!bytes) throw new Error("The raw file is missing.");
    bytes[100] = 57;
    const stored = await storeFit(lab.desk, person(), input);
    if (stored.status !== "saved") throw new Error(stored.status);
    await background.settled();
    const { fit } = await getFit(lab.store.db, lab.lab.id, stored.fitId);
    expect(fit).toMatchObject({
      verification: "differs",
      verificationNote: "The stored file of W01_off.csv is no longer the one that was taken in.",
    });
  });

  it("marks a fit that the engine breaks on, instead of trying for ever", async () => {
    const input = await fitOf(lab, recordingId);
    vi.spyOn(background.engine, "analyze").mockResolvedValueOnce({
      status: "failed",
      reason: "RangeError: out of bounds",
    });
    const stored = await storeFit(lab.desk, person(), input);
    if (stored.status !== "saved") throw new Error(stored.sentence);
    await background.settled();
    const { fit } = await getFit(lab.store.db, lab.lab.id, stored.fitId);
    expect(fit.verification).toBe("differs");
    expect(fit.verificationNote).toMatch(/because of a fault in Ogee/);
  });

  it("accepts a result of another engine version whose numbers agree", async () => {
    const input = await fitOf(lab, recordingId);
    const stored = await storeFit(lab.desk, person(), {
      ...input,
      result: { ...input.result, engine: "ogee-engine 0.9.0" },
    });
    if (stored.status !== "saved") throw new Error(stored.status);
    await background.settled();
    const { fit } = await getFit(lab.store.db, lab.lab.id, stored.fitId);
    expect(fit).toMatchObject({ verification: "verified", engine: "ogee-engine 0.9.0" });
  });

  it("is taken up by the next process where one ended before it", async () => {
    const fitId = await saved();
    await lab.store.write((tx) => updateVerification(tx, fitId, "unverified", null));
    await resumeWork(lab.desk);
    await background.settled();
    expect((await getFit(lab.store.db, lab.lab.id, fitId)).fit.verification).toBe("verified");
  });
});

describe("submitting a fit", () => {
  it("waits until the server has looked again", async () => {
    const fitId = await saved();
    await lab.store.write((tx) => updateVerification(tx, fitId, "unverified", null));
    expect(await submitFit(lab.desk, person(), { fitId, version: 1 })).toMatchObject({
      status: "not_verified",
      verification: "unverified",
    });
  });

  it("does not go through twice, nor for a fit that another has replaced", async () => {
    const fitId = await submitted();
    expect(await submitFit(lab.desk, person(), { fitId, version: 1 })).toMatchObject({
      status: "stale",
      current: { state: "submitted", version: 2, isSuperseded: false },
    });
    expect(await submitFit(lab.desk, person(), { fitId, version: 2 })).toMatchObject({
      status: "refused",
    });
    await saved();
    expect(await submitFit(lab.desk, person(), { fitId, version: 3 })).toMatchObject({
      status: "stale",
      current: { isSuperseded: true },
    });
  });

  it("from a recording's page reaches that recording's fits alone", async () => {
    const fitId = await saved();
    const file = { bytes: recordingBytes({ K: 3, B: 0.05, I: 0.004 }), fileName: "other.csv" };
    const otherId = await readyRecording(lab, study, file);
    const gate = await openTestGate(lab);
    const cookie = await signInAs(gate, lab.people.biomechanist.id, lab.lab.id);
    const submitFrom = (id: string) => {
      const json = { intent: "submit", fitId, version: 1 };
      return recordingPage.action(visit(lab, gate, `/recordings/${id}`, { id }, { cookie, json }));
    };
    await expect(submitFrom(otherId)).rejects.toMatchObject({ status: 404 });
    expect(await submitFrom(recordingId)).toEqual({ status: "submitted", version: 2 });
  });

  it("is for the biomechanist of the lab", async () => {
    const fitId = await saved();
    const input = { fitId, version: 1 };
    await expect(submitFit(lab.desk, lab.actor("manager"), input)).rejects.toMatchObject({
      status: 403,
    });
    await expect(submitFit(lab.desk, lab.outsideActor, input)).rejects.toMatchObject({
      status: 404,
    });
  });
});

describe("reviewing a fit", () => {
  const reviewer = () => lab.actor("reviewer");

  it("approves after the residuals were opened, and writes both down", async () => {
    const fitId = await submitted();
    const input = { fitId, version: 2, decision: "approved", note: "" } as const;
    expect(await reviewFit(lab.desk, reviewer(), input)).toMatchObject({
      status: "residuals_unopened",
    });
    await openResiduals(lab.desk, reviewer(), { fitId });
    await openResiduals(lab.desk, reviewer(), { fitId });
    const opened = await listEvents(lab.store.db, lab.lab.id, { kind: "fit.residuals_opened" });
    expect(opened).toHaveLength(1);
    expect(await reviewFit(lab.desk, reviewer(), input)).toEqual({
      status: "approved",
      version: 3,
    });
    const seen = await getFit(lab.store.db, lab.lab.id, fitId);
    expect(seen.fit.state).toBe("approved");
    expect(seen.reviews).toMatchObject([{ decision: "approved", reviewerName: "The reviewer" }]);
    expect((await lastEvent("fit.approved"))?.personId).toBe(reviewer().personId);
  });

  it("does not take somebody else's look at the residuals, or at another fit's, for one's own", async () => {
    const first = await submitted();
    await openResiduals(lab.desk, reviewer(), { fitId: first });
    const second = await submitted();
    const other: Actor = { ...lab.actor("analyst"), roles: ["reviewer"] };
    await openResiduals(lab.desk, other, { fitId: second });
    const input = { fitId: second, version: 2, decision: "approved", note: "" } as const;
    expect(await reviewFit(lab.desk, reviewer(), input)).toMatchObject({
      status: "residuals_unopened",
    });
  });

  it("returns with a note, and the fit can be submitted again", async () => {
    const fitId = await submitted();
    const input = { fitId, version: 2, decision: "returned" } as const;
    expect(await reviewFit(lab.desk, reviewer(), { ...input, note: "  " })).toMatchObject({
      status: "note_missing",
    });
    expect(await reviewFit(lab.desk, reviewer(), { ...input, note: "Trim 3" })).toEqual({
      status: "returned",
      version: 3,
    });
    expect(await submitFit(lab.desk, person(), { fitId, version: 3 })).toEqual({
      status: "submitted",
      version: 4,
    });
  });

  it("is decided once: a second reviewer with the older page is told", async () => {
    const fitId = await submitted();
    await openResiduals(lab.desk, reviewer(), { fitId });
    const input = { fitId, version: 2, note: "No", decision: "returned" } as const;
    await reviewFit(lab.desk, reviewer(), input);
    const late = await reviewFit(lab.desk, reviewer(), { ...input, decision: "approved" });
    expect(late).toMatchObject({ status: "stale", current: { state: "returned", version: 3 } });
  });

  it("is never one's own: not taken in, not saved, not even in an older fit", async () => {
    const both: Actor = { ...person(), roles: ["biomechanist", "reviewer"] };
    const helper: Actor = { ...lab.actor("manager"), roles: ["biomechanist", "reviewer"] };
    await saved(setAsideFirst, helper);
    const fitId = await submitted();
    for (const [actor, sentence] of [
      [both, "You took this recording in, so another reviewer decides on it."],
      [helper, "You saved a fit of this recording, so another reviewer decides on it."],
    ] as const) {
      await openResiduals(lab.desk, actor, { fitId });
      for (const decision of ["approved", "returned"] as const) {
        const input = { fitId, version: 2, decision, note: "Fine" };
        expect(await reviewFit(lab.desk, actor, input)).toEqual({ status: "own_work", sentence });
      }
    }
    const queue = await listSubmitted(lab.store.db, lab.lab.id, helper.personId);
    expect(queue).toMatchObject([{ fitId, hasOpenedResiduals: true }]);
    expect(queue[0]?.whyNot).toContain("You saved a fit of this recording");
    const open = await listSubmitted(lab.store.db, lab.lab.id, reviewer().personId);
    expect(open).toMatchObject([{ fitId, whyNot: null, hasOpenedResiduals: false }]);
    expect(await listSubmitted(lab.store.db, lab.otherLab.id, helper.personId)).toEqual([]);
  });

  it("is for the reviewer of the lab, and for submitted fits", async () => {
    const fitId = await saved();
    const input = { fitId, version: 1, decision: "returned", note: "x" } as const;
    expect(await reviewFit(lab.desk, reviewer(), input)).toMatchObject({ status: "refused" });
    await expect(reviewFit(lab.desk, person(), input)).rejects.toMatchObject({ status: 403 });
    await expect(openResiduals(lab.desk, person(), { fitId })).rejects.toMatchObject({
      status: 403,
    });
    await expect(reviewFit(lab.desk, lab.outsideActor, input)).rejects.toMatchObject({
      status: 404,
    });
    await expect(openResiduals(lab.desk, lab.outsideActor, { fitId })).rejects.toMatchObject({
      status: 404,
    });
  });

  it("is undone by a newer fit, and the event says what was approved", async () => {
    const fitId = await submitted();
    await openResiduals(lab.desk, reviewer(), { fitId });
    await reviewFit(lab.desk, reviewer(), { fitId, version: 2, decision: "approved", note: "" });
    await saved(setAsideFirst);
    expect(JSON.parse((await lastEvent("fit.saved"))?.detail ?? "")).toMatchObject({
      supersededFitId: fitId,
      supersededState: "approved",
    });
    const [current] = await listCurrentFits(lab.store.db, lab.lab.id, study.studyId);
    expect(current).toMatchObject({ number: 2, state: "draft", participantCode: "W01" });
  });
});

describe("openings and downloads", () => {
  it("write an opening once for a while, and each download", async () => {
    const fitId = await saved();
    const count = async (kind: string) =>
      (await listEvents(lab.store.db, lab.lab.id, { kind })).length;
    await noteRecordingOpened(lab.desk, lab.actor("analyst"), recordingId);
    await noteRecordingOpened(lab.desk, lab.actor("analyst"), recordingId);
    expect(await count("recording.opened")).toBe(1);
    lab.desk.clock.advance(11 * 60 * 1000);
    await noteRecordingOpened(lab.desk, lab.actor("analyst"), recordingId);
    expect(await count("recording.opened")).toBe(2);
    for (let times = 0; times < 2; times += 1) {
      await noteRecordingDownloaded(lab.desk, lab.actor("manager"), recordingId);
      await noteFitDownloaded(lab.desk, lab.actor("analyst"), { fitId, document: "result.json" });
    }
    expect(await count("recording.downloaded")).toBe(2);
    expect(await count("fit.downloaded")).toBe(2);
    await expect(
      noteRecordingOpened(lab.desk, lab.outsideActor, recordingId),
    ).rejects.toMatchObject({ status: 404 });
  });
});

describe("a participant's value", () => {
  it("of one recording is the fit's own mean over windows with its interval", async () => {
    const { fit } = await getFit(lab.store.db, lab.lab.id, await saved());
    const values = await participantValues(lab.desk, lab.actor("analyst"), study.studyId);
    expect(values.map((value) => value.direction).sort()).toEqual(["extension", "flexion"]);
    for (const value of values) {
      const pooled = fit.result.pooled.find((each) => each.direction === value.direction);
      for (const term of ["K", "B", "I"] as const) {
        expect(value[term].mean).toBe(pooled?.[term].window_mean);
        expect(value[term].t).toEqual(pooled?.[term].t);
      }
      expect(value).toMatchObject({
        participantCode: "W01",
        conditionName: "Off",
        axis: "FE",
        windows: 3,
        level: 0.95,
        state: "draft",
        isVerified: true,
        protocolNumbers: [1],
      });
    }
  });

  it("takes the windows of several recordings of a cell together, and says mixed protocols and states", async () => {
    await submitted();
    await addProtocol(lab.desk, person(), {
      studyId: study.studyId,
      basedOnProtocolId: study.protocolId,
      choices: { ...defaultChoices, window_ms: [0, 90] },
      note: "",
    });
    recordingId = await readyRecording(lab, study, {
      bytes: recordingBytes({ K: 3, B: 0.05, I: 0.004 }),
      fileName: "W01_off_2.csv",
    });
    await saved();
    const values = await participantValues(lab.desk, lab.actor("analyst"), study.studyId);
    expect(values).toHaveLength(2);
    const extension = values.find((value) => value.direction === "extension");
    expect(extension).toMatchObject({
      windows: 6,
      state: "draft",
      protocolNumbers: [1, 2],
      fits: [{ state: "submitted" }, { state: "draft" }],
    });
    // Half of the windows about 2 N·m/rad, half about 3.
    expect(extension?.K.mean).toBeGreaterThan(2.4);
    expect(extension?.K.mean).toBeLessThan(2.7);
    expect(extension?.K.windows).toBe(6);
  });

  it("stays apart by visit and by condition", async () => {
    await saved();
    recordingId = await readyRecording(lab, study, {
      bytes: recordingBytes({ K: 3, B: 0.05, I: 0.004 }),
      day: "2026-12-01",
    });
    await saved();
    recordingId = await readyRecording(lab, study, {
      bytes: recordingBytes({ K: 4, B: 0.05, I: 0.004 }),
      condition: 1,
    });
    await saved();
    const values = await participantValues(lab.desk, lab.actor("analyst"), study.studyId);
    expect(
      values
        .filter((value) => value.direction === "extension")
        .map((value) => [value.conditionName, value.day, value.windows]),
    ).toEqual([
      ["Off", "2026-11-30", 3],
      ["Off", "2026-12-01", 3],
      ["On", "2026-11-30", 3],
    ]);
  });

  it("does not exist for another lab", async () => {
    await expect(
      participantValues(lab.desk, lab.outsideActor, study.studyId),
    ).rejects.toMatchObject({ status: 404 });
  });
});
