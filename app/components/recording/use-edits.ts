import { useCallback, useEffect, useMemo, useRef, useState } from "react";
import type { SavedWindow } from "#app/domain/fit.ts";
import {
  countUnsaved,
  markSaved,
  restoreEdits,
  serializeEdits,
  startEdits,
  type WindowEdits,
} from "#app/domain/window.ts";

/** Where edits begin: the current fit's windows, or those that the engine finds. */
export interface EditBase {
  recordingSha256: string;
  baseFitId: string | null;
  axes: readonly string[];
  windows: readonly SavedWindow[];
}

export interface Edits {
  /** Null until the recording is there. */
  list: WindowEdits | null;
  unsaved: number;
  /** Unsaved edits came back after a reload or a lost connection. */
  restored: number;
  /** Edits made on another fit than the current one: a person has to choose. */
  theirs: EditBase | null;
  /** False where this browser cannot keep them. */
  kept: boolean;
  change(next: (list: WindowEdits) => WindowEdits): void;
  /** These windows were saved as this fit. */
  saved(fitId: string, windows: readonly SavedWindow[]): void;
  /** Goes on with one's own edits, over what is current now. */
  keepMine(): void;
  /** Goes on with the current fit; the own list stays for `bringBack`. */
  takeTheirs(): void;
  /** The own list that was left for the current fit's, or null. */
  left: WindowEdits | null;
  bringBack(): void;
}

/** One place for each person and recording. */
export function editsKey(personId: string, recordingId: string): string {
  return `ogee.edits.${personId}.${recordingId}`;
}

/**
 * A person's edits of one recording's windows. What is not saved is kept in this browser and comes
 * back after a reload.
 */
export function useEdits(storageKey: string, base: EditBase | null): Edits {
  const [list, setList] = useState<WindowEdits | null>(null);
  const [left, setLeft] = useState<WindowEdits | null>(null);
  const [restored, setRestored] = useState(0);
  const [kept, setKept] = useState(true);
  const lists = useRef(list);
  lists.current = list;
  /** Bases that one's own saving has replaced: the page may still hold one for a moment. */
  const replaced = useRef(new Set<string | null>());

  // The first list: what was kept here, else the base.
  useEffect(() => {
    if (base === null) return;
    const now = lists.current;
    if (now === null) {
      const back = restore(storageKey, base);
      setList(back ?? startEdits(base));
      setRestored(back === null ? 0 : countUnsaved(back));
    } else if (countUnsaved(now) === 0 && !replaced.current.has(base.baseFitId)) {
      const isOther = now.baseFitId !== base.baseFitId;
      // Windows that the engine found under another protocol are other windows.
      if (isOther || base.baseFitId === null) setList(startEdits(base));
    }
  }, [base, storageKey]);

  useEffect(() => {
    if (list !== null) setKept(keep(storageKey, list));
  }, [list, storageKey]);

  const theirs =
    base !== null &&
    list !== null &&
    list.baseFitId !== base.baseFitId &&
    !replaced.current.has(base.baseFitId) &&
    countUnsaved(list) > 0
      ? base
      : null;

  const change = useCallback((next: (held: WindowEdits) => WindowEdits) => {
    setList((held) => (held === null ? null : next(held)));
    setRestored(0);
  }, []);
  const saved = useCallback((fitId: string, windows: readonly SavedWindow[]) => {
    setRestored(0);
    setList((held) => {
      if (held === null) return null;
      replaced.current.add(held.baseFitId);
      // Edits made while the answer was on its way are not among what was saved.
      return { ...markSaved(held, fitId), saved: windows };
    });
  }, []);
  const keepMine = useCallback(() => {
    if (theirs === null) return;
    setList((held) =>
      held === null
        ? null
        : { ...held, baseFitId: theirs.baseFitId, saved: startEdits(theirs).windows },
    );
  }, [theirs]);
  const takeTheirs = useCallback(() => {
    if (theirs === null) return;
    setLeft(lists.current);
    setList(startEdits(theirs));
  }, [theirs]);
  const bringBack = useCallback(() => {
    if (left === null) return;
    setList((held) =>
      held === null ? left : { ...left, baseFitId: held.baseFitId, saved: held.saved },
    );
    setLeft(null);
  }, [left]);

  return useMemo(
    () => ({
      list,
      unsaved: list === null ? 0 : countUnsaved(list),
      restored,
      theirs,
      kept,
      change,
      saved,
      keepMine,
      takeTheirs,
      left,
      bringBack,
    }),
    [list, restored, theirs, kept, change, saved, keepMine, takeTheirs, left, bringBack],
  );
}

function restore(storageKey: string, base: EditBase): WindowEdits | null {
  try {
    const text = localStorage.getItem(storageKey);
    if (text === null) return null;
    const back = restoreEdits(text, base);
    return back.status === "unusable" ? null : back.edits;
  } catch {
    return null;
  }
}

/** @returns whether the browser could keep it */
function keep(storageKey: string, list: WindowEdits): boolean {
  try {
    if (countUnsaved(list) === 0) localStorage.removeItem(storageKey);
    else localStorage.setItem(storageKey, serializeEdits(list));
    return true;
  } catch {
    return false;
  }
}
