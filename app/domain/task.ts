import { type Actor, may } from "./role.ts";

/** What waits for a person, by role: the lines of their own page. */

export interface StudyProgress {
  id: string;
  name: string;
  participants: number;
  conditions: number;
  protocols: number;
  recordings: number;
  fits: { draft: number; submitted: number; returned: number; approved: number };
}

export type TaskKind =
  | "returned"
  | "review"
  | "no_fit"
  | "draft"
  | "no_conditions"
  | "no_protocol"
  | "no_participants";

export interface Task {
  kind: TaskKind;
  studyId: string;
  studyName: string;
  /** How many objects wait; 1 for a study that lacks something. */
  count: number;
}

/** What came back first, then what others wait for, then what was begun, then what is missing. */
const ORDER: readonly TaskKind[] = [
  "returned",
  "review",
  "draft",
  "no_fit",
  "no_conditions",
  "no_protocol",
  "no_participants",
];

/**
 * @param reviewable  how many submitted fits of each study this person may decide on, by study id
 */
export function listTasks(
  actor: Pick<Actor, "roles">,
  studies: readonly StudyProgress[],
  reviewable: ReadonlyMap<string, number>,
): Task[] {
  const tasks = studies.flatMap((study) => {
    const counts: [TaskKind, number][] = [];
    if (may(actor, "fit")) {
      counts.push(["returned", study.fits.returned]);
      counts.push(["draft", study.fits.draft]);
      counts.push(["no_fit", recordingsWithoutFit(study)]);
    }
    if (may(actor, "review")) counts.push(["review", reviewable.get(study.id) ?? 0]);
    if (may(actor, "set_up_study")) {
      counts.push(["no_conditions", study.conditions === 0 ? 1 : 0]);
      counts.push(["no_protocol", study.protocols === 0 ? 1 : 0]);
      counts.push(["no_participants", study.participants === 0 ? 1 : 0]);
    }
    return counts
      .filter(([, count]) => count > 0)
      .map(([kind, count]) => ({ kind, count, studyId: study.id, studyName: study.name }));
  });
  return tasks.sort((a, b) => ORDER.indexOf(a.kind) - ORDER.indexOf(b.kind));
}

export function recordingsWithoutFit(study: StudyProgress): number {
  const { draft, submitted, returned, approved } = study.fits;
  return Math.max(0, study.recordings - draft - submitted - returned - approved);
}
