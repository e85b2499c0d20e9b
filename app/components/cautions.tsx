/** The cautions that the product shows, in two lengths. */

export function Cautions({ length = "short" }: { length?: "short" | "full" }) {
  if (length === "short") {
    return (
      <p className="max-w-prose text-sm text-ink-2">
        Research use; not a medical device and not for diagnosis. Perturbing a joint can injure:
        stops, limits, an emergency stop in the participant’s hand, ethics approval and qualified
        supervision come before any recording.
      </p>
    );
  }
  return (
    <div className="max-w-prose space-y-2 text-sm text-ink-2">
      <p>
        For research. Ogee is not a medical device and not for diagnosis or for setting a device on
        a patient.
      </p>
      <p>
        Perturbing a person’s joint can injure. Mechanical stops, torque and velocity limits, an
        emergency stop in the participant’s hand, approval by the institution’s ethics board, and
        supervision by qualified staff come before any recording. Local rules decide.
      </p>
      <p>
        Identifying details of participants stay out of file names and notes; use the participant’s
        code.
      </p>
    </div>
  );
}
