import { recordEvent } from "#app/db/events.server.ts";
import { type FitRow, getFitRow, updateFitState } from "#app/db/fits.server.ts";
import type { FitState, Verification } from "#app/domain/fit.ts";
import { notFound } from "#app/domain/refusal.ts";
import type { Actor } from "#app/domain/role.ts";
import type { Desk } from "./desk.server.ts";
import { requireAbility } from "./permission.server.ts";

/** The fit as it stands now, for a person whose page shows an older state. */
export interface StaleFit {
  status: "stale";
  sentence: string;
  current: { state: FitState; version: number; isSuperseded: boolean };
}

export type SubmittedFit =
  | { status: "submitted"; version: number }
  | StaleFit
  | { status: "not_verified"; verification: Verification; sentence: string }
  | { status: "refused"; sentence: string };

/**
 * Hands a verified fit over for review.
 *
 * @param input.recordingId  where the fit was sent from its recording's page: one of another
 *   recording is not there
 */
export async function submitFit(
  desk: Desk,
  actor: Actor,
  input: { fitId: string; version: number; recordingId?: string },
): Promise<SubmittedFit> {
  requireAbility(actor, "submit");
  const at = desk.clock.now();
  return desk.store.write(async (tx) => {
    const fit = await getFitRow(tx, actor.labId, input.fitId);
    if (input.recordingId !== undefined && fit.recordingId !== input.recordingId) throw notFound();
    if (fit.version !== input.version || fit.supersededAt !== null) return staleFit(fit);
    if (fit.state !== "draft" && fit.state !== "returned") {
      return {
        status: "refused",
        sentence: `This fit is ${fit.state} already: nothing is left to submit.`,
      };
    }
    if (fit.verification !== "verified") {
      return {
        status: "not_verified",
        verification: fit.verification,
        sentence:
          fit.verification === "unverified"
            ? "The server is still computing this fit a second time: submit it when it is verified."
            : `The server computed other numbers, so this fit cannot be submitted: open the recording and save it again. ${fit.verificationNote ?? ""}`.trim(),
      };
    }
    const version = await updateFitState(tx, fit.id, input.version, "submitted");
    if (version === null) return staleFit(fit);
    await recordEvent(tx, {
      at,
      labId: actor.labId,
      personId: actor.personId,
      kind: "fit.submitted",
      objectType: "fit",
      objectId: fit.id,
      detail: { recordingId: fit.recordingId, number: fit.number, from: fit.state },
    });
    return { status: "submitted", version };
  });
}

export function staleFit(fit: FitRow): StaleFit {
  const isSuperseded = fit.supersededAt !== null;
  return {
    status: "stale",
    sentence: isSuperseded
      ? "A newer fit has taken this one's place: load the page again to see it."
      : `This fit was changed meanwhile and is now ${fit.state}: load the page again.`,
    current: { state: fit.state, version: fit.version, isSuperseded },
  };
}
