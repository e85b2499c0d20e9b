import { Button } from "#app/components/button.tsx";
import type { TestedSide } from "#app/domain/rig-map.ts";
import type { AxisMovement } from "#app/engine/types.ts";
import { type AxisDraft, isConfirmed, isSignGuessed, otherSide } from "./map-draft.ts";
import { describeMovement } from "./movement-words.ts";

/** The first movement in words, and the question whether it went that way. */
export function MovementNote({
  axis,
  draft,
  side,
  movement,
  isMoot,
  onConfirm,
  onTurn,
  onTurnTorque,
}: {
  axis: { label: string; positive: string; negative: string };
  draft: AxisDraft;
  /** Null: the participant is not chosen. */
  side: TestedSide | null;
  /** Null while the file is being read. */
  movement: AxisMovement | null;
  /** The map has gaps or the file cannot be read: there is nothing to see yet. */
  isMoot: boolean;
  onConfirm: () => void;
  onTurn: () => void;
  onTurnTorque: () => void;
}) {
  if (isMoot) return null;
  if (side === null) {
    return (
      <p className="text-sm text-ink-2">
        Choose the participant to see the first movement: left and right limbs turn opposite ways.
      </p>
    );
  }
  if (movement === null) {
    return (
      <p className="text-sm text-ink-2" role="status">
        Looking for the first movement.
      </p>
    );
  }
  const words = describeMovement(movement, axis, {
    angle: draft.angle.sign[side],
    torque: draft.torque.sign[side],
  });
  const done = isConfirmed(draft, side);
  return (
    <div className={`border-l-2 pl-2.5 ${done ? "border-rule" : "border-ink"}`}>
      <p className={done ? "" : "font-semibold"}>{words.text}</p>
      <p className={words.stiffness === "negative" ? "font-semibold" : "text-sm text-ink-2"}>
        {words.torque}
      </p>
      {isSignGuessed(draft, side) && !done ? (
        <p className="text-sm text-ink-2">
          The {side} side was not seen yet: its signs are the opposite of the {otherSide(side)}{" "}
          side’s.
        </p>
      ) : null}
      <div className="mt-1.5 flex flex-wrap gap-2">
        {done ? (
          <span className="inline-flex min-h-[30px] items-center text-sm text-ink-2">
            Confirmed ({side} side)
          </span>
        ) : (
          <Button onClick={onConfirm} type="button">
            Confirm ({side} side)
            <span className="sr-only"> about {axis.label}</span>
          </Button>
        )}
        {words.otherWay ? (
          <Button onClick={onTurn} type="button">
            No, towards {words.otherWay}
            <span className="sr-only"> about {axis.label}</span>
          </Button>
        ) : null}
        {words.stiffness === "negative" ? (
          <Button onClick={onTurnTorque} type="button">
            Turn the torque round
            <span className="sr-only"> about {axis.label}</span>
          </Button>
        ) : null}
      </div>
    </div>
  );
}
