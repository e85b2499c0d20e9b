import { type FormEvent, useEffect, useState } from "react";
import { Button } from "#app/components/button.tsx";
import { Dialog } from "#app/components/dialog.tsx";
import { TextField } from "#app/components/field.tsx";
import { formatMs, spanInWords } from "./words.ts";

/** A number as typed, with a point or a comma; NaN where it is none. */
export function readTyped(text: string): number {
  const plain = text.trim().replace("−", "-").replace(",", ".");
  return /^-?(\d+\.?\d*|\.\d+)$/.test(plain) ? Number(plain) : Number.NaN;
}

/** A window where the engine found none: its onset at the cursor, or typed. */
export function AddWindowDialog({
  open,
  onClose,
  onAdd,
  cursorS,
  windowMs,
  startS,
  endS,
  takenS,
}: {
  open: boolean;
  onClose: () => void;
  onAdd: (onsetS: number) => void;
  cursorS: number | null;
  windowMs: readonly [number, number];
  startS: number;
  endS: number;
  /** Onsets of the axis' windows. */
  takenS: readonly number[];
}) {
  const [typed, setTyped] = useState("");
  const [error, setError] = useState<string | null>(null);

  // biome-ignore lint/correctness/useExhaustiveDependencies: the cursor counts when the question is opened; it may move on meanwhile.
  useEffect(() => {
    if (!open) return;
    setTyped(cursorS === null ? "" : cursorS.toFixed(3));
    setError(null);
  }, [open]);

  function submit(event: FormEvent) {
    event.preventDefault();
    const onsetS = readTyped(typed);
    const near = takenS.find((taken) => Math.abs(taken - onsetS) < 0.01);
    if (Number.isNaN(onsetS))
      setError("Write the onset as a number of seconds, for example 12.34.");
    else if (onsetS < startS || onsetS > endS) {
      setError(`The recording runs from ${startS.toFixed(2)} to ${endS.toFixed(2)} s.`);
    } else if (near !== undefined) {
      setError(`A window begins at ${near.toFixed(3)} s already: trim that one.`);
    } else onAdd(onsetS);
  }

  return (
    <Dialog
      actions={
        <Button form="add-window" look="do" type="submit">
          Add this window
        </Button>
      }
      onClose={onClose}
      open={open}
      title="Add a window by hand"
    >
      <form id="add-window" onSubmit={submit}>
        <TextField
          autoFocus
          className="max-w-40 font-mono"
          error={error}
          hint={
            cursorS === null
              ? "In the recording’s own time."
              : "In the recording’s own time; the cursor stands there now."
          }
          inputMode="decimal"
          label="Onset of the movement"
          onChange={(event) => setTyped(event.target.value)}
          unit="s"
          value={typed}
        />
        <p className="mt-2 text-sm text-ink-2">
          The window is {spanInWords(windowMs)} after it, {formatMs(windowMs[1] - windowMs[0])} ms
          long, and can be trimmed like any other.
        </p>
      </form>
    </Dialog>
  );
}
