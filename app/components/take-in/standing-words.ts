import type { Standing } from "./batch.ts";

/** At most so many wants stand in a row; the rest is counted. */
const SHOWN_WANTS = 2;

/** How a file stands, in words; what is linked (ready, held) is said by the row itself. */
export function standingInWords(standing: Standing): string {
  switch (standing.kind) {
    case "reading":
      return standing.share === null ? "reading" : `reading, ${percent(standing.share)}`;
    case "needs_you": {
      const shown = standing.wants.slice(0, SHOWN_WANTS).join("; ");
      const more = standing.wants.length - SHOWN_WANTS;
      return `needs you: ${shown}${more > 0 ? `; and ${more} more` : ""}`;
    }
    case "good":
      return "can be taken in";
    case "same":
      return `the same bytes as ${standing.as} above: taken in once`;
    case "held": {
      const { fileName, participantCode, conditionName } = standing.recording;
      return `already in the lab as ${fileName} (${participantCode}, ${conditionName})`;
    }
    case "waiting":
      return "waits for its turn";
    case "sending":
      return `uploading ${percent(standing.share)}`;
    case "broken":
      return `stopped at ${percent(standing.share)}: ${standing.sentence}`;
    case "verifying":
      return "being verified";
    case "ready":
      return "ready";
    case "refused":
      return `refused: ${standing.sentence}`;
  }
}

/** Rounded down, so that 100 % is said only of what is whole. */
export function percent(share: number): string {
  return `${Math.floor(100 * share)} %`;
}

/** What stands beside the button: why it takes only these files, or none. */
export function reasonInWords({
  waiting,
  good,
  reading,
  underWay,
}: {
  /** Files that need a person, in the list's order. */
  waiting: readonly { name: string; standing: Standing }[];
  /** How many can be taken in, are being read, are on their way. */
  good: number;
  reading: number;
  underWay: number;
}): string {
  const parts: string[] = [];
  const [first, ...others] = waiting;
  if (first) {
    const wants = first.standing.kind === "needs_you" ? first.standing.wants : [];
    parts.push(
      others.length === 0
        ? `${first.name} needs you: ${wants[0] ?? ""}.`
        : `${waiting.length} files need you, first ${first.name}: ${wants[0] ?? ""}.`,
    );
  }
  if (!first && reading === 0 && underWay === 0 && good === 0) {
    parts.push("Nothing on the list is left to take in.");
  }
  if (reading > 0) parts.push(`${reading} ${reading === 1 ? "file is" : "files are"} being read.`);
  return parts.join(" ");
}
