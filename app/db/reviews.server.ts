import { and, asc, eq, inArray, isNull } from "drizzle-orm";
import type { Verification } from "#app/domain/fit.ts";
import { type Decision, type HandsOnRecording, whyNotReviewer } from "#app/domain/review.ts";
import type { Reader, Transaction } from "./client.server.ts";
import { findLastEvent } from "./events.server.ts";
import { placeColumns, type RecordingPlace } from "./recordings.server.ts";
import {
  conditions,
  events,
  fits,
  fitWindows,
  participants,
  people,
  postures,
  protocols,
  recordings,
  reviews,
  studies,
  visits,
} from "./schema.ts";

export interface ListedReview {
  id: string;
  reviewerId: string;
  reviewerName: string;
  decision: Decision;
  note: string;
  decidedAt: number;
}

/** Every decision on a fit, the oldest first. */
export function listReviews(db: Reader, fitId: string): Promise<ListedReview[]> {
  return db
    .select({
      id: reviews.id,
      reviewerId: reviews.reviewerId,
      reviewerName: people.name,
      decision: reviews.decision,
      note: reviews.note,
      decidedAt: reviews.decidedAt,
    })
    .from(reviews)
    .innerJoin(people, eq(people.id, reviews.reviewerId))
    .where(eq(reviews.fitId, fitId))
    .orderBy(asc(reviews.decidedAt));
}

export async function insertReview(
  tx: Transaction,
  row: typeof reviews.$inferInsert,
): Promise<void> {
  await tx.insert(reviews).values(row);
}

/** What the opening of a fit's residuals is written down as. */
export const RESIDUALS_OPENED = "fit.residuals_opened";

export async function hasOpenedResiduals(
  db: Reader,
  fitId: string,
  personId: string,
): Promise<boolean> {
  const match = { personId, kind: RESIDUALS_OPENED, objectType: "fit", objectId: fitId };
  return (await findLastEvent(db, match)) !== null;
}

/** Everyone who took in, saved, trimmed or set aside anything of these recordings, by recording. */
export async function findHandsOnRecordings(
  db: Reader,
  recordingIds: readonly string[],
): Promise<Map<string, HandsOnRecording>> {
  const ids = [...recordingIds];
  const [takenIn, saved, edited] = await Promise.all([
    db
      .select({ id: recordings.id, personId: recordings.takenInBy })
      .from(recordings)
      .where(inArray(recordings.id, ids)),
    db
      .selectDistinct({ id: fits.recordingId, personId: fits.savedBy })
      .from(fits)
      .where(inArray(fits.recordingId, ids)),
    db
      .selectDistinct({ id: fits.recordingId, personId: fitWindows.editedBy })
      .from(fitWindows)
      .innerJoin(fits, eq(fits.id, fitWindows.fitId))
      .where(inArray(fits.recordingId, ids)),
  ]);
  return new Map(
    takenIn.map(({ id, personId }) => [
      id,
      {
        takenInBy: personId,
        savedBy: saved.filter((row) => row.id === id).map((row) => row.personId),
        editedBy: edited.flatMap((row) =>
          row.id === id && row.personId !== null ? [row.personId] : [],
        ),
      },
    ]),
  );
}

export interface SubmittedFit extends RecordingPlace {
  fitId: string;
  number: number;
  version: number;
  verification: Verification;
  protocolNumber: number;
  savedById: string;
  savedByName: string;
  savedAt: number;
  /** When it was handed over for review. */
  submittedAt: number;
  /** Why this reviewer may not decide on it, or null where they may. */
  whyNot: string | null;
  hasOpenedResiduals: boolean;
}

/** A lab's fits that wait for a decision, the longest waiting first, as this reviewer sees them. */
export async function listSubmitted(
  db: Reader,
  labId: string,
  reviewerId: string,
): Promise<SubmittedFit[]> {
  const rows = await db
    .select({
      place: placeColumns,
      fitId: fits.id,
      number: fits.number,
      version: fits.version,
      verification: fits.verification,
      protocolNumber: protocols.number,
      savedById: fits.savedBy,
      savedByName: people.name,
      savedAt: fits.savedAt,
    })
    .from(fits)
    .innerJoin(recordings, eq(recordings.id, fits.recordingId))
    .innerJoin(studies, eq(studies.id, recordings.studyId))
    .innerJoin(participants, eq(participants.id, recordings.participantId))
    .innerJoin(conditions, eq(conditions.id, recordings.conditionId))
    .innerJoin(postures, eq(postures.id, recordings.postureId))
    .innerJoin(visits, eq(visits.id, recordings.visitId))
    .innerJoin(protocols, eq(protocols.id, fits.protocolId))
    .innerJoin(people, eq(people.id, fits.savedBy))
    .where(and(eq(fits.labId, labId), eq(fits.state, "submitted"), isNull(fits.supersededAt)));
  const ids = rows.map((row) => row.fitId);
  const [hands, marks] = await Promise.all([
    findHandsOnRecordings(
      db,
      rows.map((row) => row.place.recordingId),
    ),
    db
      .select({
        fitId: events.objectId,
        kind: events.kind,
        at: events.at,
        personId: events.personId,
      })
      .from(events)
      .where(
        and(
          eq(events.objectType, "fit"),
          inArray(events.objectId, ids),
          inArray(events.kind, ["fit.submitted", RESIDUALS_OPENED]),
        ),
      )
      .orderBy(asc(events.sequence)),
  ]);
  return rows
    .map(({ place, ...fit }) => {
      const own = marks.filter((mark) => mark.fitId === fit.fitId);
      const hand = hands.get(place.recordingId);
      return {
        ...place,
        ...fit,
        submittedAt: own.findLast((mark) => mark.kind === "fit.submitted")?.at ?? fit.savedAt,
        whyNot: hand ? whyNotReviewer(reviewerId, hand) : null,
        hasOpenedResiduals: own.some(
          (mark) => mark.kind === RESIDUALS_OPENED && mark.personId === reviewerId,
        ),
      };
    })
    .sort((a, b) => a.submittedAt - b.submittedAt);
}
