import { recordEvent } from "#app/db/events.server.ts";
import { getFitRow, updateFitState } from "#app/db/fits.server.ts";
import {
  findHandsOnRecordings,
  hasOpenedResiduals,
  insertReview,
  RESIDUALS_OPENED,
} from "#app/db/reviews.server.ts";
import { type Decision, whyNotReviewer } from "#app/domain/review.ts";
import type { Actor } from "#app/domain/role.ts";
import type { Desk } from "./desk.server.ts";
import { requireAbility } from "./permission.server.ts";
import { type StaleFit, staleFit } from "./submit-fit.server.ts";

export type ReviewedFit =
  | { status: Decision; version: number }
  | StaleFit
  /** The person had a hand in this recording. */
  | { status: "own_work"; sentence: string }
  | { status: "residuals_unopened"; sentence: string }
  | { status: "note_missing"; sentence: string }
  | { status: "refused"; sentence: string };

/** Approves or returns a submitted fit. */
export async function reviewFit(
  desk: Desk,
  actor: Actor,
  input: { fitId: string; version: number; decision: Decision; note: string },
): Promise<ReviewedFit> {
  requireAbility(actor, "review");
  const at = desk.clock.now();
  const note = input.note.trim();
  return desk.store.write(async (tx) => {
    const fit = await getFitRow(tx, actor.labId, input.fitId);
    if (fit.version !== input.version || fit.supersededAt !== null) return staleFit(fit);
    if (fit.state !== "submitted") {
      return {
        status: "refused",
        sentence: `This fit is ${fit.state}: only a submitted fit is approved or returned.`,
      };
    }
    const hands = (await findHandsOnRecordings(tx, [fit.recordingId])).get(fit.recordingId);
    const whyNot = hands ? whyNotReviewer(actor.personId, hands) : null;
    if (whyNot !== null) return { status: "own_work", sentence: whyNot };
    if (input.decision === "approved" && !(await hasOpenedResiduals(tx, fit.id, actor.personId))) {
      return {
        status: "residuals_unopened",
        sentence: "Open the residuals of this fit before you approve it.",
      };
    }
    if (input.decision === "returned" && note === "") {
      return {
        status: "note_missing",
        sentence: "Say what should be changed: a fit is returned with a note.",
      };
    }
    const version = await updateFitState(tx, fit.id, input.version, input.decision);
    if (version === null) return staleFit(fit);
    await insertReview(tx, {
      id: desk.clock.newId(),
      fitId: fit.id,
      reviewerId: actor.personId,
      decision: input.decision,
      note,
      decidedAt: at,
    });
    await recordEvent(tx, {
      at,
      labId: actor.labId,
      personId: actor.personId,
      kind: `fit.${input.decision}`,
      objectType: "fit",
      objectId: fit.id,
      detail: { recordingId: fit.recordingId, number: fit.number, note },
    });
    return { status: input.decision, version };
  });
}

/** Notes that this reviewer has opened the residuals of this fit; once is enough. */
export async function openResiduals(
  desk: Desk,
  actor: Actor,
  input: { fitId: string },
): Promise<{ status: "opened" }> {
  requireAbility(actor, "review");
  const at = desk.clock.now();
  await desk.store.write(async (tx) => {
    const fit = await getFitRow(tx, actor.labId, input.fitId);
    if (await hasOpenedResiduals(tx, fit.id, actor.personId)) return;
    await recordEvent(tx, {
      at,
      labId: actor.labId,
      personId: actor.personId,
      kind: RESIDUALS_OPENED,
      objectType: "fit",
      objectId: fit.id,
      detail: { recordingId: fit.recordingId, number: fit.number },
    });
  });
  return { status: "opened" };
}
