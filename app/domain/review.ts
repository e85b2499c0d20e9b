/** The rules of a review: nobody approves their own work, and nobody approves unseen. */

export const DECISIONS = ["approved", "returned"] as const;
export type Decision = (typeof DECISIONS)[number];

/** Everyone who had a hand in what a fit rests on. */
export interface HandsOnRecording {
  takenInBy: string;
  /** Who saved any fit of the recording, superseded ones too. */
  savedBy: readonly string[];
  /** Who trimmed or set aside any window of the recording. */
  editedBy: readonly string[];
}

/** Why this person may not decide on a fit of this recording, or null where they may. */
export function whyNotReviewer(reviewerId: string, hands: HandsOnRecording): string | null {
  if (hands.takenInBy === reviewerId) {
    return "You took this recording in, so another reviewer decides on it.";
  }
  if (hands.savedBy.includes(reviewerId)) {
    return "You saved a fit of this recording, so another reviewer decides on it.";
  }
  if (hands.editedBy.includes(reviewerId)) {
    return "You trimmed or set aside windows of this recording, so another reviewer decides on it.";
  }
  return null;
}
