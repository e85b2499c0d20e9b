import { type FormEvent, useEffect, useState } from "react";
import { Button } from "#app/components/button.tsx";
import { Dialog } from "#app/components/dialog.tsx";
import { CheckField, TextField } from "#app/components/field.tsx";

/** What most often spoils a window; any other sentence can be typed. */
export const USUAL_REASONS = [
  "The participant moved before the onset",
  "A muscle was active before the onset",
  "The perturbation is not as commanded",
  "The limb slipped in the rig",
  "A signal is disturbed",
] as const;

const LONGEST = 300;

/** Asks why a window is set aside: chosen or typed. */
export function SetAsideDialog({
  windowNumber,
  open,
  onClose,
  onSetAside,
}: {
  windowNumber: number;
  open: boolean;
  onClose: () => void;
  onSetAside: (reason: string) => void;
}) {
  const [chosen, setChosen] = useState<string | null>(USUAL_REASONS[0]);
  const [typed, setTyped] = useState("");
  const [error, setError] = useState<string | null>(null);

  useEffect(() => {
    if (!open) return;
    setChosen(USUAL_REASONS[0]);
    setTyped("");
    setError(null);
  }, [open]);

  function submit(event: FormEvent) {
    event.preventDefault();
    const reason = (chosen ?? typed).trim();
    if (reason === "") setError("Say in a sentence why this window is set aside.");
    else onSetAside(reason);
  }

  return (
    <Dialog
      actions={
        <Button form="set-aside" look="do" type="submit">
          Set window {windowNumber} aside
        </Button>
      }
      onClose={onClose}
      open={open}
      title={`Why is window ${windowNumber} set aside?`}
    >
      <form className="flex flex-col gap-1" id="set-aside" onSubmit={submit}>
        {USUAL_REASONS.map((reason) => (
          <CheckField
            checked={chosen === reason}
            key={reason}
            label={reason}
            name="reason"
            onChange={() => setChosen(reason)}
            type="radio"
            value={reason}
          />
        ))}
        <CheckField
          checked={chosen === null}
          label="Another reason"
          name="reason"
          onChange={() => setChosen(null)}
          type="radio"
          value=""
        />
        <TextField
          error={error}
          label="Another reason, in a sentence"
          labelHidden
          maxLength={LONGEST}
          onChange={(event) => {
            setTyped(event.target.value);
            setChosen(null);
          }}
          value={typed}
        />
      </form>
    </Dialog>
  );
}
