/** The last things that happened in a lab, as lines that a person reads: several alike are one. */

export const HAPPENING_KINDS = [
  "study.created",
  "protocol.added",
  "participant.added",
  "recording.taken_in",
  "recording.refused",
  "fit.saved",
  "fit.submitted",
  "fit.approved",
  "fit.returned",
  "fit.differs",
] as const;
export type HappeningKind = (typeof HAPPENING_KINDS)[number];

export interface Happening {
  sequence: number;
  at: number;
  kind: HappeningKind;
  /** Null where the server did it by itself. */
  personName: string | null;
  study: { id: string; name: string };
  /** What it happened to, in words ("W07, firm"); null where the study says it. */
  about: string | null;
  /** Where it leads. */
  href: string;
}

export interface HappeningLine {
  sequence: number;
  /** Of the last of them. */
  at: number;
  personName: string | null;
  /** "submitted 3 fits of". */
  sentence: string;
  study: { id: string; name: string };
  about: string | null;
  href: string;
}

/**
 * Neighbours of one person, one kind and one study become one line with a count, which leads to
 * the study.
 *
 * @param happenings  the newest first
 */
export function gatherHappenings(happenings: readonly Happening[], most: number): HappeningLine[] {
  const groups: Happening[][] = [];
  for (const happening of happenings) {
    const last = groups.at(-1);
    const [before] = last ?? [];
    if (
      last &&
      before?.kind === happening.kind &&
      before.personName === happening.personName &&
      before.study.id === happening.study.id
    ) {
      last.push(happening);
    } else {
      groups.push([happening]);
    }
  }
  return groups.slice(0, most).flatMap((group) => {
    const [newest] = group;
    if (!newest) return [];
    const { sequence, at, personName, study } = newest;
    const isOne = group.length === 1;
    return [
      {
        sequence,
        at,
        personName,
        study,
        sentence: sentenceOf(newest.kind, group.length),
        about: isOne ? newest.about : null,
        href: isOne ? newest.href : `/studies/${study.id}`,
      },
    ];
  });
}

/** Up to where the name of what it happened to goes on. */
function sentenceOf(kind: HappeningKind, count: number): string {
  const things = (one: string) => (count === 1 ? `a ${one}` : `${count} ${one}s`);
  switch (kind) {
    case "study.created":
      return "set up";
    case "protocol.added":
      return count === 1 ? "stated a protocol of" : `stated ${count} versions of the protocol of`;
    case "participant.added":
      return `added ${things("participant")} to`;
    case "recording.taken_in":
      return `took in ${things("recording")} of`;
    case "recording.refused":
      return `refused ${things("recording")} of`;
    case "fit.saved":
      return `saved ${things("fit")} of`;
    case "fit.submitted":
      return `submitted ${things("fit")} of`;
    case "fit.approved":
      return `approved ${things("fit")} of`;
    case "fit.returned":
      return `returned ${things("fit")} of`;
    case "fit.differs":
      return `found other numbers for ${things("fit")} of`;
  }
}
