import { afterEach, beforeEach, describe, expect, it } from "vitest";
import { listHappenings } from "#app/db/happenings.server.ts";
import { findStudyIdOf, listStudies } from "#app/db/studies.server.ts";
import { background } from "#app/workflows/background.server.ts";
import { storeFit } from "#app/workflows/store-fit.server.ts";
import { submitFit } from "#app/workflows/submit-fit.server.ts";
import { openTestLab, type TestLab } from "../support/lab.ts";
import { fitOf, readyRecording, setUpStudy, type TestStudy } from "../support/study.ts";

let lab: TestLab;
let study: TestStudy;
beforeEach(async () => {
  lab = await openTestLab();
  study = await setUpStudy(lab);
});
afterEach(() => lab.close());

/** One recording with a submitted fit. */
async function submitOne() {
  const actor = lab.actor("biomechanist");
  const recordingId = await readyRecording(lab, study);
  const saved = await storeFit(lab.desk, actor, await fitOf(lab, recordingId));
  if (saved.status !== "saved") throw new Error(`The fit is ${saved.status}.`);
  await background.settled();
  const sent = await submitFit(lab.desk, actor, { fitId: saved.fitId, version: 1 });
  expect(sent.status).toBe("submitted");
  return { recordingId, fitId: saved.fitId };
}

// A whole analysis runs twice in each; a busy machine needs its time.
describe("what a lab's own page counts and tells", { timeout: 20_000 }, () => {
  it("counts participants, recordings and current fits by their state", async () => {
    await submitOne();
    const [summary] = await listStudies(lab.store.db, lab.lab.id);
    expect(summary).toMatchObject({
      participants: 2,
      conditions: 2,
      protocols: 1,
      recordings: 1,
      fits: { draft: 0, submitted: 1, returned: 0, approved: 0 },
    });
  });

  it("tells what happened, the newest first, with whom it was about and where it leads", async () => {
    const { recordingId, fitId } = await submitOne();
    const told = await listHappenings(lab.store.db, lab.lab.id);
    expect(told.map((one) => one.kind)).toEqual([
      "fit.submitted",
      "fit.saved",
      "recording.taken_in",
      "protocol.added",
      "study.created",
    ]);
    expect(told[0]).toMatchObject({
      personName: "The biomechanist",
      about: "W01, Off",
      href: `/fits/${fitId}`,
      study: { id: study.studyId },
    });
    expect(told[2]?.href).toBe(`/recordings/${recordingId}`);
  });

  it("keeps all of it from another lab", async () => {
    const { recordingId, fitId } = await submitOne();
    const other = lab.otherLab.id;
    expect(await listStudies(lab.store.db, other)).toEqual([]);
    expect(await listHappenings(lab.store.db, other)).toEqual([]);
    for (const object of [
      { type: "recording", id: recordingId },
      { type: "fit", id: fitId },
    ] as const) {
      expect(await findStudyIdOf(lab.store.db, other, object)).toBeNull();
      expect(await findStudyIdOf(lab.store.db, lab.lab.id, object)).toBe(study.studyId);
    }
  });
});
