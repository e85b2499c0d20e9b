import { useEffect, useRef, useState } from "react";

const STORAGE_KEY = "ogee.single-keys";

/** Whether single keys work, as this person left it on this computer. */
export function useSingleKeys(): [boolean, (enabled: boolean) => void] {
  const [enabled, setEnabled] = useState(true);
  useEffect(() => {
    try {
      setEnabled(localStorage.getItem(STORAGE_KEY) !== "off");
    } catch {
      // A browser that keeps nothing leaves them on.
    }
  }, []);
  return [
    enabled,
    (next) => {
      setEnabled(next);
      try {
        localStorage.setItem(STORAGE_KEY, next ? "on" : "off");
      } catch {
        // It holds until the page is left.
      }
    },
  ];
}

/**
 * Single keys of a page: "x", "shift+z", "arrowleft". Nothing happens while something is typed, in
 * an open dialog, or together with Ctrl, Alt or the command key.
 */
export function useKeys(keys: Readonly<Record<string, () => void>>, enabled: boolean): void {
  const held = useRef(keys);
  held.current = keys;
  useEffect(() => {
    const pressed = (event: KeyboardEvent) => {
      if (event.defaultPrevented || event.ctrlKey || event.altKey || event.metaKey) return;
      if (isTyping(event.target) || document.querySelector("dialog[open]")) return;
      const name = event.key.toLowerCase();
      const run = (event.shiftKey && held.current[`shift+${name}`]) || held.current[name];
      // The list of keys can always be opened: there they are switched on again.
      if (!run || (!enabled && name !== "?")) return;
      event.preventDefault();
      run();
    };
    document.addEventListener("keydown", pressed);
    return () => document.removeEventListener("keydown", pressed);
  }, [enabled]);
}

function isTyping(target: EventTarget | null): boolean {
  return (
    target instanceof HTMLElement &&
    (target.isContentEditable || target.closest("input, select, textarea") !== null)
  );
}
