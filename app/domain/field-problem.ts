/**
 * What is wrong with a document, in sentences: the schema says where, these words say what to do.
 */
import type { z } from "zod";
import { shown } from "./strict-json.ts";

/** One problem of a document, for a screen or the command line. */
export interface FieldProblem {
  /** Dotted. */
  field: string;
  sentence: string;
}

type Issue = z.core.$ZodIssue;

/** What is said of a key that a document does not have; null for the usual sentence. */
type UnknownKeySentence = (path: PropertyKey[], key: string) => string | null;

/**
 * All problems of a document that its schema refused.
 *
 * @param document  what was read, so that a sentence can show the value
 */
export function problemsOf(
  error: z.ZodError,
  document: unknown,
  unknownKey: UnknownKeySentence = () => null,
): FieldProblem[] {
  return error.issues.map((issue) => problemOf(issue, [], document, unknownKey));
}

function problemOf(
  issue: Issue,
  parent: PropertyKey[],
  document: unknown,
  unknownKey: UnknownKeySentence,
): FieldProblem {
  const path = [...parent, ...issue.path];
  const field = path.map(String).join(".");
  const value = valueAt(document, path);
  if (issue.code === "unrecognized_keys") {
    const key = issue.keys[0] ?? "";
    return {
      field: [...path, key].map(String).join("."),
      sentence:
        unknownKey(path, key) ??
        `${shown(key)} is not a key that is known here; remove it or correct its spelling.`,
    };
  }
  if (issue.code === "invalid_union") {
    const branch = likeliestBranch(issue.errors);
    if (branch !== undefined) return problemOf(branch, path, document, unknownKey);
  }
  if (value === undefined && issue.code !== "custom") {
    return { field, sentence: "This field is missing; it is required." };
  }
  return { field, sentence: sentenceFor(issue, value) };
}

/** Of a union's branches the one that was most likely meant: it got furthest into the value. */
function likeliestBranch(branches: Issue[][]): Issue | undefined {
  const depth = (branch: Issue[]) => Math.max(...branch.map((issue) => issue.path.length));
  const sorted = branches
    .filter((branch) => branch.length > 0)
    .sort((a, b) => depth(b) - depth(a) || a.length - b.length);
  return sorted[0]?.[0];
}

function sentenceFor(issue: Issue, value: unknown): string {
  switch (issue.code) {
    case "custom":
      return issue.message;
    case "invalid_type":
      return `${shownValue(value)} is not ${TYPE_WORDS[issue.expected] ?? "what is asked for here"}.`;
    case "invalid_value":
      return issue.message.startsWith("Invalid")
        ? `${shownValue(value)} is not known here; use ${oneOf(issue.values)}.`
        : issue.message;
    case "too_small":
      if (issue.origin === "array") return `At least ${counted(issue.minimum)} needed here.`;
      if (issue.origin === "string") return issue.message;
      return issue.inclusive
        ? `${shownValue(value)} is too small; the least is ${issue.minimum}.`
        : `${shownValue(value)} is too small; it must be over ${issue.minimum}.`;
    case "too_big":
      if (issue.origin === "array") return `At most ${issue.maximum} entries may stand here.`;
      return `${shownValue(value)} is too large; the most is ${issue.maximum}.`;
    case "invalid_format":
      return issue.message;
    default:
      return `${shownValue(value)} does not fit here.`;
  }
}

const TYPE_WORDS: Record<string, string> = {
  number: "a number",
  int: "a whole number",
  string: "a text in quotes",
  boolean: "true or false",
  object: "an object in { braces }",
  record: "an object in { braces }",
  array: "a list in [ brackets ]",
  tuple: "a list in [ brackets ]",
};

function counted(count: number | bigint): string {
  return count === 1 ? "one entry is" : `${count} entries are`;
}

/** Words for a choice: "deg, rad or mrad". */
export function oneOf(values: readonly unknown[]): string {
  const words = values.map((value) => (typeof value === "string" ? value : String(value)));
  const shownWords = words.map((each) => (/^\S+$/.test(each) && each !== "," ? each : shown(each)));
  return shownWords.length < 2
    ? shownWords.join("")
    : `${shownWords.slice(0, -1).join(", ")} or ${shownWords.at(-1)}`;
}

/** A value as it stands in the document, shortened. */
export function shownValue(value: unknown): string {
  if (typeof value === "string") return shown(value);
  if (Array.isArray(value)) return "A list";
  if (typeof value === "object" && value !== null) return "An object";
  return String(value);
}

function valueAt(document: unknown, path: PropertyKey[]): unknown {
  let value = document;
  for (const key of path) {
    if (typeof value !== "object" || value === null || !Object.hasOwn(value, key)) return undefined;
    value = (value as Record<PropertyKey, unknown>)[key];
  }
  return value;
}
