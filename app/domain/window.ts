/**
 * Windows as people leave them: the WINDOWS document that makes every fit again without a screen,
 * and the list of edits from which a screen can go back and forth without limit.
 */
import { z } from "zod";
import type { WindowChoice, WindowsDocument } from "#app/engine/types.ts";
import { canonicalJson } from "./canonical-json.ts";
import { problemsOf, shownValue } from "./field-problem.ts";
import { isSameWindow, type SavedWindow, savedWindowSchema, windowsDocumentOf } from "./fit.ts";
import { parseStrictJson, StrictJsonError } from "./strict-json.ts";

// ---------------------------------------------------------------- the document

/** What is wrong with a WINDOWS document, in a sentence. */
export class WindowsError extends Error {
  /** Line of the text, from 1, where the text is no JSON document. */
  readonly line: number | null;

  constructor(message: string, line: number | null = null) {
    super(message);
    this.name = "WindowsError";
    this.line = line;
  }
}

const milliseconds = z.number().min(-10_000).max(10_000);

export const windowsSchema = z.strictObject({
  version: z.literal(1),
  windows: z.array(
    z.strictObject({
      recording_sha256: z
        .string()
        .regex(/^[0-9a-fA-F]{64}$/, "A SHA-256 is 64 hexadecimal digits.")
        .toLowerCase(),
      axis: z.string().min(1, "The name of an axis may not be empty."),
      onset_s: z.number(),
      window_ms: z
        .tuple([milliseconds, milliseconds])
        .refine(([start, end]) => start < end, "The end must come after the start."),
      included: z.boolean(),
      reason: z.string().nullable().default(null),
    }),
  ),
});

/**
 * Reads a WINDOWS document.
 *
 * @throws WindowsError
 */
export function parseWindows(text: string): WindowsDocument {
  const document = readDocument(text);
  if (typeof document !== "object" || document === null || Array.isArray(document)) {
    throw new WindowsError("A document of windows is one JSON object in { braces }.");
  }
  const { version } = document as Record<string, unknown>;
  if (version !== undefined && version !== 1) {
    throw new WindowsError(`Version ${shownValue(version)} is not known; use 1.`);
  }
  const read = windowsSchema.safeParse(document);
  if (!read.success) {
    const [first] = problemsOf(read.error, document);
    throw new WindowsError(
      first === undefined ? "It cannot be read." : `${first.field}: ${first.sentence}`,
    );
  }
  const seen = new Set<string>();
  read.data.windows.forEach((window, index) => {
    const key = canonicalJson([window.recording_sha256, window.axis, window.onset_s]);
    if (seen.has(key)) {
      throw new WindowsError(
        `windows.${index}: The window of ${window.axis} at ${window.onset_s} s stands twice; it would count twice.`,
      );
    }
    seen.add(key);
  });
  return read.data;
}

function readDocument(text: string): unknown {
  try {
    return parseStrictJson(text);
  } catch (error) {
    if (error instanceof StrictJsonError) throw new WindowsError(error.message, error.line);
    throw error;
  }
}

/** The text of a WINDOWS document for one recording: sorted keys, no white space. */
export function windowsDocument(recordingSha256: string, windows: readonly WindowChoice[]): string {
  return canonicalJson(windowsDocumentOf(recordingSha256, windows));
}

// ---------------------------------------------------------------- edits

/** A window is known by its axis and its onset; neither changes. */
export type WindowKey = Pick<SavedWindow, "axis" | "onset_s">;

/** One step of a person: what it did in words, and the windows before and after it. */
export interface WindowEdit {
  kind: "trim" | "trim_all" | "set_aside" | "take_back" | "add";
  words: string;
  changes: readonly { before: SavedWindow | null; after: SavedWindow }[];
}

/** A recording's windows with the way they came about. Never changed in place. */
export interface WindowEdits {
  recordingSha256: string;
  /** The fit whose windows these were at first, or null for the engine's own. */
  baseFitId: string | null;
  /** Names of the axes in the protocol's order: windows stand by axis, then onset. */
  axes: readonly string[];
  /** Before the first edit. */
  start: readonly SavedWindow[];
  /** As last saved. */
  saved: readonly SavedWindow[];
  edits: readonly WindowEdit[];
  /** Edits that are in effect; those behind it were undone. */
  done: number;
  /** What the screen shows now. */
  windows: readonly SavedWindow[];
}

/** Windows as the engine found them, untouched. */
export function foundWindows(found: readonly WindowChoice[]): SavedWindow[] {
  return found.map((window) => ({ ...window, origin: "found", edited: false }));
}

export function startEdits(base: {
  recordingSha256: string;
  baseFitId: string | null;
  axes: readonly string[];
  windows: readonly SavedWindow[];
}): WindowEdits {
  const windows = inOrder(base.windows, base.axes);
  return {
    recordingSha256: base.recordingSha256,
    baseFitId: base.baseFitId,
    axes: base.axes,
    start: windows,
    saved: windows,
    edits: [],
    done: 0,
    windows,
  };
}

/** @throws RangeError where there is no such window, or its end does not come after its start */
export function trim(list: WindowEdits, key: WindowKey, window_ms: [number, number]): WindowEdits {
  refuseSpan(window_ms);
  const before = windowAt(list, key);
  if (isSameSpan(before.window_ms, window_ms)) return list;
  return withEdit(list, {
    kind: "trim",
    words: `Trimmed ${named(key)} to ${spanInWords(window_ms)}`,
    changes: [{ before, after: { ...before, window_ms, edited: true } }],
  });
}

/** Gives all windows of an axis, also those set aside, the same trim, in one step. */
export function applyTrimToAll(
  list: WindowEdits,
  axis: string,
  window_ms: [number, number],
): WindowEdits {
  refuseSpan(window_ms);
  const changes = list.windows
    .filter((window) => window.axis === axis && !isSameSpan(window.window_ms, window_ms))
    .map((before) => ({ before, after: { ...before, window_ms, edited: true } }));
  if (changes.length === 0) return list;
  const count = changes.length === 1 ? "1 window" : `${changes.length} windows`;
  return withEdit(list, {
    kind: "trim_all",
    words: `Trimmed ${count} of ${axis} to ${spanInWords(window_ms)}`,
    changes,
  });
}

/** @throws RangeError where there is no such window, or no reason is given */
export function setAside(list: WindowEdits, key: WindowKey, reason: string): WindowEdits {
  const before = windowAt(list, key);
  const sentence = reason.trim();
  if (sentence === "") throw new RangeError("A window that is set aside needs a reason.");
  if (!before.included && before.reason === sentence) return list;
  return withEdit(list, {
    kind: "set_aside",
    words: `Set aside ${named(key)}: ${sentence}`,
    changes: [{ before, after: { ...before, included: false, reason: sentence, edited: true } }],
  });
}

/** Includes a window again. @throws RangeError where there is no such window */
export function takeBack(list: WindowEdits, key: WindowKey): WindowEdits {
  const before = windowAt(list, key);
  if (before.included) return list;
  return withEdit(list, {
    kind: "take_back",
    words: `Took back ${named(key)}`,
    changes: [{ before, after: { ...before, included: true, reason: null, edited: true } }],
  });
}

/** A window where the engine found none. Nothing changes where one begins at this onset already. */
export function addByHand(
  list: WindowEdits,
  added: WindowKey & Pick<SavedWindow, "window_ms">,
): WindowEdits {
  refuseSpan(added.window_ms);
  if (list.windows.some((window) => isAt(window, added))) return list;
  const after: SavedWindow = {
    axis: added.axis,
    onset_s: added.onset_s,
    window_ms: added.window_ms,
    included: true,
    reason: null,
    origin: "by_hand",
    edited: true,
  };
  return withEdit(list, {
    kind: "add",
    words: `Added ${named(added)} by hand`,
    changes: [{ before: null, after }],
  });
}

export function undo(list: WindowEdits): WindowEdits {
  const edit = editToUndo(list);
  if (edit === null) return list;
  return {
    ...list,
    done: list.done - 1,
    windows: replaced(
      list,
      edit.changes.map(({ before, after }) => ({ from: after, to: before })),
    ),
  };
}

export function redo(list: WindowEdits): WindowEdits {
  const edit = editToRedo(list);
  if (edit === null) return list;
  return { ...list, done: list.done + 1, windows: forwards(list, edit) };
}

/** What undo would take back, for its label; null where there is nothing. */
export function editToUndo(list: WindowEdits): WindowEdit | null {
  return list.edits[list.done - 1] ?? null;
}

/** What redo would do again, for its label; null where there is nothing. */
export function editToRedo(list: WindowEdits): WindowEdit | null {
  return list.edits[list.done] ?? null;
}

/** Windows that differ from what is saved: 0 again where every change was undone. */
export function countUnsaved(list: WindowEdits): number {
  const changed = list.windows.filter(
    (window) => !list.saved.some((saved) => isSameWindow(saved, window)),
  );
  const gone = list.saved.filter((saved) => !list.windows.some((window) => isAt(window, saved)));
  return changed.length + gone.length;
}

/** After saving: what stands now is the new fit's; undo still reaches back beyond it. */
export function markSaved(list: WindowEdits, fitId: string): WindowEdits {
  return { ...list, baseFitId: fitId, saved: list.windows };
}

// ---------------------------------------------------------------- over a reload

const changeSchema = z.strictObject({
  before: savedWindowSchema.nullable(),
  after: savedWindowSchema,
});

const storedSchema = z.strictObject({
  version: z.literal(1),
  recording_sha256: z.string(),
  base_fit_id: z.string().nullable(),
  start: z.array(savedWindowSchema),
  saved: z.array(savedWindowSchema),
  edits: z.array(
    z.strictObject({
      kind: z.enum(["trim", "trim_all", "set_aside", "take_back", "add"]),
      words: z.string(),
      changes: z.array(changeSchema),
    }),
  ),
  done: z.int().min(0),
});

/** The list as text, to be kept until it is saved. */
export function serializeEdits(list: WindowEdits): string {
  return canonicalJson({
    version: 1,
    recording_sha256: list.recordingSha256,
    base_fit_id: list.baseFitId,
    start: list.start,
    saved: list.saved,
    edits: list.edits,
    done: list.done,
  });
}

export type RestoredEdits =
  | { status: "restored"; edits: WindowEdits }
  /** They were made on another fit of this recording than the one that is current now. */
  | { status: "other_base"; edits: WindowEdits }
  /** Of another recording, or no list of edits. */
  | { status: "unusable" };

/**
 * Takes up a list again after a reload.
 *
 * @param now  the recording on the screen and its current fit
 */
export function restoreEdits(
  text: string,
  now: Pick<WindowEdits, "recordingSha256" | "baseFitId" | "axes">,
): RestoredEdits {
  let document: unknown;
  try {
    document = JSON.parse(text);
  } catch {
    return { status: "unusable" };
  }
  const read = storedSchema.safeParse(document);
  if (!read.success) return { status: "unusable" };
  const stored = read.data;
  const isForeign =
    stored.recording_sha256 !== now.recordingSha256 ||
    stored.done > stored.edits.length ||
    stored.start.some((window) => !now.axes.includes(window.axis));
  if (isForeign) return { status: "unusable" };

  let edits: WindowEdits = {
    ...startEdits({
      recordingSha256: stored.recording_sha256,
      baseFitId: stored.base_fit_id,
      axes: now.axes,
      windows: stored.start,
    }),
    saved: inOrder(stored.saved, now.axes),
    edits: stored.edits,
  };
  while (edits.done < stored.done) edits = redo(edits);
  return {
    status: stored.base_fit_id === now.baseFitId ? "restored" : "other_base",
    edits,
  };
}

// ---------------------------------------------------------------- parts

function withEdit(list: WindowEdits, edit: WindowEdit): WindowEdits {
  return {
    ...list,
    edits: [...list.edits.slice(0, list.done), edit],
    done: list.done + 1,
    windows: forwards(list, edit),
  };
}

function forwards(list: WindowEdits, edit: WindowEdit): readonly SavedWindow[] {
  return replaced(
    list,
    edit.changes.map(({ before, after }) => ({ from: before, to: after })),
  );
}

function replaced(
  list: WindowEdits,
  changes: readonly { from: SavedWindow | null; to: SavedWindow | null }[],
): readonly SavedWindow[] {
  const kept = list.windows.filter(
    (window) => !changes.some(({ from }) => from !== null && isAt(window, from)),
  );
  const put = changes.flatMap(({ to }) => (to === null ? [] : [to]));
  return inOrder([...kept, ...put], list.axes);
}

function inOrder(windows: readonly SavedWindow[], axes: readonly string[]): readonly SavedWindow[] {
  return [...windows].sort(
    (a, b) => axes.indexOf(a.axis) - axes.indexOf(b.axis) || a.onset_s - b.onset_s,
  );
}

function windowAt(list: WindowEdits, key: WindowKey): SavedWindow {
  const window = list.windows.find((each) => isAt(each, key));
  if (window === undefined) throw new RangeError(`There is no window of ${named(key)}.`);
  return window;
}

function isAt(window: WindowKey, key: WindowKey): boolean {
  return window.axis === key.axis && window.onset_s === key.onset_s;
}

function isSameSpan(one: readonly [number, number], other: readonly [number, number]): boolean {
  return one[0] === other[0] && one[1] === other[1];
}

function refuseSpan([start, end]: readonly [number, number]): void {
  if (!(start >= -10_000 && start < end && end <= 10_000)) {
    throw new RangeError("A window ends after it begins, within 10 s of its onset.");
  }
}

function named(key: WindowKey): string {
  return `${key.axis} at ${decimals(key.onset_s, 3)} s`;
}

function spanInWords([start, end]: readonly [number, number]): string {
  return `${decimals(start, 1)} to ${decimals(end, 1)} ms`;
}

/** At most `places` decimals, with a true minus. */
function decimals(value: number, places: number): string {
  return String(Number(value.toFixed(places))).replace("-", "−");
}
