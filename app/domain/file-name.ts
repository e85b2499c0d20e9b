/**
 * What a recording's file name says. A study keeps a pattern such as
 * `{participant}_{condition}_{posture}_{repeat}`; without one, or where a name does not follow it,
 * the codes that the study knows are looked for. A proposal, never a decision: a person confirms it.
 */

/** The codes that a study knows; a proposal is always one of them. */
export interface KnownCodes {
  participants: readonly string[];
  conditions: readonly string[];
  postures: readonly string[];
  axes: readonly string[];
}

/** What the name says, each as the study spells it; null where it does not say, or not for sure. */
export interface FileNameProposal {
  participant: string | null;
  condition: string | null;
  posture: string | null;
  axis: string | null;
  repeat: number | null;
}

const CODE_FIELDS = ["participant", "condition", "posture", "axis"] as const;
type CodeField = (typeof CODE_FIELDS)[number];
const PATTERN_FIELDS = [...CODE_FIELDS, "repeat", "any"] as const;
type PatternField = (typeof PATTERN_FIELDS)[number];

/** What is wrong with a pattern, in a sentence; null where it can be used. */
export function fileNamePatternProblem(pattern: string): string | null {
  const names = [...pattern.matchAll(/\{([^{}]*)\}/g)].map((match) => match[1] ?? "");
  const known: readonly string[] = PATTERN_FIELDS;
  const unknown = names.find((name) => !known.includes(name));
  if (unknown !== undefined) {
    return `{${unknown}} is not known; use {participant}, {condition}, {posture}, {axis}, {repeat} or {any}.`;
  }
  if (/[{}]/.test(pattern.replace(/\{[^{}]*\}/g, ""))) {
    return "A brace in the pattern has no partner.";
  }
  const twice = names.find((name, index) => name !== "any" && names.indexOf(name) < index);
  if (twice !== undefined) return `{${twice}} stands twice in the pattern.`;
  if (!names.some((name) => name !== "any")) {
    return "The pattern names nothing; put {participant} or another word in braces into it.";
  }
  return null;
}

/**
 * Reads participant, condition, posture, axis and repetition from a file's name. Case, `-`, `_`,
 * blanks and leading zeros do not matter: `w7-brace off` is W07 and "Brace off".
 *
 * @param pattern  the study's, or null
 */
export function proposeFromFileName(
  fileName: string,
  pattern: string | null,
  known: KnownCodes,
): FileNameProposal {
  const parts = partsOf(stemOf(fileName));
  const codes: Record<CodeField, readonly Code[]> = {
    participant: codesOf(known.participants),
    condition: codesOf(known.conditions),
    posture: codesOf(known.postures),
    axis: codesOf(known.axes),
  };
  if (pattern !== null && fileNamePatternProblem(pattern) === null) {
    const followed = follow(elementsOf(pattern), parts, codes);
    if (followed !== null && countFound(followed) > 0) return followed;
  }
  return search(parts, codes);
}

// ---------------------------------------------------------------- a name in parts

/** A run of letters or a number; `opens` where a separator (or the start) stands before it. */
interface Part {
  text: string;
  opens: boolean;
}

interface Code {
  name: string;
  key: string;
}

function stemOf(fileName: string): string {
  const last = fileName.split(/[/\\]/).at(-1) ?? "";
  return last.replace(/\.[a-z][a-z0-9]{0,4}$/i, "").normalize("NFC");
}

/** "W07_brace-off" → w, 7, brace, off; a point between digits belongs to the number. */
function partsOf(text: string): Part[] {
  const parts: Part[] = [];
  let end = -1;
  for (const match of text.matchAll(/\d+(?:[.,]\d+)*|[\p{L}\p{M}]+|[^\d\p{L}\p{M}\s_.-]+/gu)) {
    parts.push({ text: canonicalPart(match[0]), opens: match.index !== end });
    end = match.index + match[0].length;
  }
  return parts;
}

function canonicalPart(text: string): string {
  return /^\d/.test(text)
    ? text.replace(",", ".").replace(/^0+(?=\d)/, "")
    : text.toLocaleLowerCase("en");
}

/** One text for all spellings of a code; two numbers side by side stay two. */
function keyOf(parts: readonly Part[]): string {
  let key = "";
  for (const { text } of parts) {
    key += /\d$/.test(key) && /^\d/.test(text) ? ` ${text}` : text;
  }
  return key;
}

/** Codes that only differ in spelling cannot be told apart and are left out. */
function codesOf(names: readonly string[]): Code[] {
  const codes = names
    .map((name) => ({ name, key: keyOf(partsOf(name.normalize("NFC"))) }))
    .filter(({ key }) => key !== "");
  return codes.filter(({ key }) => codes.filter((other) => other.key === key).length === 1);
}

// ---------------------------------------------------------------- by the pattern

type Element = { field: PatternField } | { literal: string };

function elementsOf(pattern: string): Element[] {
  return pattern.split(/(\{[^{}]*\})/).flatMap((piece): Element[] => {
    const field = PATTERN_FIELDS.find((each) => piece === `{${each}}`);
    if (field !== undefined) return [{ field }];
    return partsOf(piece).map(({ text }) => ({ literal: text }));
  });
}

const NOTHING: FileNameProposal = {
  participant: null,
  condition: null,
  posture: null,
  axis: null,
  repeat: null,
};

/** The reading of the whole name that finds most known codes; null where it does not follow. */
function follow(
  elements: readonly Element[],
  parts: readonly Part[],
  codes: Record<CodeField, readonly Code[]>,
): FileNameProposal | null {
  const [element, ...rest] = elements;
  if (element === undefined) return parts.length === 0 ? NOTHING : null;

  let best: FileNameProposal | null = null;
  const consider = (length: number, found: Partial<FileNameProposal>) => {
    const remaining = follow(rest, parts.slice(length), codes);
    if (remaining === null) return;
    const reading = { ...remaining, ...found };
    if (best === null || countFound(reading) > countFound(best)) best = reading;
  };

  if ("literal" in element) {
    if (parts[0]?.text === element.literal) consider(1, {});
    return best;
  }
  const { field } = element;
  for (let length = parts.length; length >= 1; length -= 1) {
    const key = keyOf(parts.slice(0, length));
    if (field === "repeat") {
      const repeat = repeatOf(parts.slice(0, length));
      if (repeat !== null) consider(length, { repeat });
      continue;
    }
    if (field !== "any") {
      const code = codes[field].find((each) => each.key === key);
      if (code !== undefined) consider(length, { [field]: code.name });
    }
    // What is not known takes one piece between separators.
    const isOnePiece = parts.slice(1, length).every((part) => !part.opens);
    const endsPiece = parts[length]?.opens ?? true;
    if (isOnePiece && endsPiece) consider(length, {});
  }
  return best;
}

function countFound(proposal: FileNameProposal): number {
  return Object.values(proposal).filter((value) => value !== null).length;
}

const REPEAT_WORDS = ["r", "rep", "repeat", "repetition", "run", "trial", "t", "no", "n", "take"];

function repeatOf(parts: readonly Part[]): number | null {
  const digits = parts.at(-1)?.text ?? "";
  if (!/^\d{1,3}$/.test(digits)) return null;
  const isPlain = parts.length === 1;
  const isNamed = parts.length === 2 && REPEAT_WORDS.includes(parts[0]?.text ?? "");
  return isPlain || isNamed ? Number(digits) : null;
}

// ---------------------------------------------------------------- without one

interface Place {
  name: string;
  start: number;
  end: number;
}

function search(
  parts: readonly Part[],
  codes: Record<CodeField, readonly Code[]>,
): FileNameProposal {
  const proposal = { ...NOTHING };
  const used = new Set<number>();
  for (const field of CODE_FIELDS) {
    const places = longest(placesOf(parts, codes[field]));
    const names = new Set(places.map((place) => place.name));
    if (names.size !== 1) continue;
    for (const place of places) {
      proposal[field] = place.name;
      for (let index = place.start; index < place.end; index += 1) used.add(index);
    }
  }
  proposal.repeat = repeatAtEnd(parts, used);
  return proposal;
}

function placesOf(parts: readonly Part[], codes: readonly Code[]): Place[] {
  const places: Place[] = [];
  for (let start = 0; start < parts.length; start += 1) {
    for (let end = start + 1; end <= parts.length; end += 1) {
      const key = keyOf(parts.slice(start, end));
      const code = codes.find((each) => each.key === key);
      if (code !== undefined) places.push({ name: code.name, start, end });
    }
  }
  return places;
}

/** "brace" inside "brace off" is not found a second time. */
function longest(places: readonly Place[]): Place[] {
  return places.filter(
    (place) =>
      !places.some(
        (other) =>
          other !== place &&
          other.start <= place.start &&
          other.end >= place.end &&
          other.end - other.start > place.end - place.start,
      ),
  );
}

function repeatAtEnd(parts: readonly Part[], used: ReadonlySet<number>): number | null {
  const last = parts.length - 1;
  if (last < 0 || used.has(last)) return null;
  const hasWord = last > 0 && !used.has(last - 1) && !parts[last]?.opens;
  return repeatOf(parts.slice(hasWord ? last - 1 : last));
}

// ---------------------------------------------------------------- who must not stand there

/** Words that begin with a capital in many file names and name nobody. */
const TRADE_WORDS = new Set(
  (
    "angle ankle arm axis base baseline bench brace calibration condition control day device dorsal dorsiflexion " +
    "elbow empty extension fast final flexion foot force grip hand hip inward joint knee left leg limb load long " +
    "max min movement muscle neutral off on outward passive active perturbation pilot plantar plantarflexion " +
    "position post posture pre pronation radial ramp random recording relaxed repeat repetition rest rig right " +
    "robot run seated second series session shoulder short side sitting slow splint standing stiffness study " +
    "subject participant supination support sweep tension test torque trial ulnar unloaded upper lower visit " +
    "walk walking wrist first third new old copy data file raw export signal signals channel channels emg " +
    "january february march april may june july august september october november december " +
    "monday tuesday wednesday thursday friday saturday sunday"
  ).split(" "),
);

/** Born up to this year: a later date is far more likely to be that of the recording. */
const LAST_BIRTH_YEAR = 2015;

/**
 * A sentence where a person's name or date of birth seems to stand in a file's name, else null.
 *
 * @param studyWords  names of the study's conditions, postures, axes and the like: never a person's
 */
export function identifyingHint(
  fileName: string,
  studyWords: readonly string[] = [],
): string | null {
  const stem = stemOf(fileName);
  const date = birthDateIn(stem);
  if (date !== null) {
    return `“${date}” in the file's name looks like a date of birth. Give the file the participant's code instead before you take it in.`;
  }
  const name = personIn(stem, studyWords);
  if (name !== null) {
    return `“${name}” in the file's name looks like a person's name. Give the file the participant's code instead before you take it in.`;
  }
  return null;
}

const DATES = [
  /(?<!\d)(?<year>(?:19|20)\d\d)(?<gap>[-_. ]?)(?<month>\d\d?)\k<gap>(?<day>\d\d?)(?!\d)/g,
  /(?<!\d)(?<day>\d\d?)(?<gap>[-_. ]?)(?<month>\d\d?)\k<gap>(?<year>(?:19|20)\d\d)(?!\d)/g,
];

function birthDateIn(stem: string): string | null {
  for (const pattern of DATES) {
    for (const match of stem.matchAll(pattern)) {
      const { year, gap, month, day } = match.groups ?? {};
      const isWritten = gap !== "" || match[0].length === 8;
      const isDay =
        isCalendarDay(Number(day), Number(month)) || isCalendarDay(Number(month), Number(day));
      const bornThen = Number(year) >= 1900 && Number(year) <= LAST_BIRTH_YEAR;
      if (isWritten && isDay && bornThen) return match[0];
    }
  }
  return null;
}

function isCalendarDay(day: number, month: number): boolean {
  return month >= 1 && month <= 12 && day >= 1 && day <= 31;
}

function personIn(stem: string, studyWords: readonly string[]): string | null {
  const own = new Set(studyWords.flatMap((text) => partsOf(text).map((part) => part.text)));
  const isCommon = (word: string) => {
    const lower = word.toLocaleLowerCase("en");
    return TRADE_WORDS.has(lower) || own.has(lower);
  };
  const pattern = /(?<!\p{L})(\p{Lu}\p{Ll}+)(?:[\s_\-.]|,\s?)?(\p{Lu}\p{Ll}+)(?!\p{L})/gu;
  for (const match of stem.matchAll(pattern)) {
    const [found, first = "", second = ""] = match;
    if (!isCommon(first) && !isCommon(second)) return found;
  }
  return null;
}
