import { useState } from "react";
import { Button } from "#app/components/button.tsx";
import { TextAreaField } from "#app/components/field.tsx";

/** What the page's keys act on. */
export const NOTE_ID = "review-note";
export const APPROVE_ID = "approve";
export const RETURN_ID = "return";

/** Approve or return: for a reviewer who had no hand in it and has seen the residuals. */
export function DecisionPanel({
  whyNot,
  hasOpenedResiduals,
  isBusy,
  said,
  onDecide,
}: {
  /** Why this person may not decide at all, or null. */
  whyNot: string | null;
  hasOpenedResiduals: boolean;
  isBusy: boolean;
  /** What the server answered, where it was no. */
  said: string | null;
  onDecide: (decision: "approved" | "returned", note: string) => void;
}) {
  const [note, setNote] = useState("");
  const [error, setError] = useState<string | null>(null);
  const approveWhyNot =
    whyNot ??
    (hasOpenedResiduals ? null : "Look at the residuals first: scroll to them, or use the link.");

  return (
    <section aria-label="Decision">
      <h2 className="mb-1">Decision</h2>
      {whyNot ? <p className="mb-2 border-l-2 border-ink pl-2.5">{whyNot}</p> : null}
      {whyNot === null && !hasOpenedResiduals ? (
        <p className="mb-2 border-l-2 border-ink pl-2.5 text-sm">
          Approving waits until you have seen the{" "}
          <a className="link" href="#residuals">
            residuals
          </a>
          .
        </p>
      ) : null}
      <TextAreaField
        disabled={whyNot !== null}
        error={error ?? said}
        id={NOTE_ID}
        hint="Needed when it is returned."
        label="Note to the biomechanist"
        maxLength={2000}
        onChange={(event) => {
          setNote(event.target.value);
          setError(null);
        }}
        value={note}
      />
      <div className="mt-2 flex flex-wrap gap-2">
        <Button
          busy={isBusy}
          busyLabel="Sending"
          id={APPROVE_ID}
          disabled={approveWhyNot !== null}
          look="do"
          onClick={() => onDecide("approved", note)}
          title={approveWhyNot ?? undefined}
          type="button"
        >
          Approve
        </Button>
        <Button
          disabled={whyNot !== null || isBusy}
          id={RETURN_ID}
          onClick={() => {
            if (note.trim() === "") setError("Say what should be changed, then return it.");
            else onDecide("returned", note);
          }}
          title={whyNot ?? undefined}
          type="button"
        >
          Return to biomechanist
        </Button>
      </div>
    </section>
  );
}
