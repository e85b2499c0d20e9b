import type { FlagCode } from "#app/engine/errors.ts";
import type { ExpectedMovement, Movement } from "#app/engine/types.ts";

const AMPLITUDE_TOLERANCE = 0.2;
const DURATION_TOLERANCE = 0.25;

/** Whether the movement was what the rig should have made, at the torque that was asked for. */
export function movementFlags(
  movement: Movement,
  expected: ExpectedMovement | null,
  backgroundNm: number | null,
  background: { target: number | null; tolerance: number | null },
): FlagCode[] {
  const codes: FlagCode[] = [];
  const { amplitudeDeg, durationMs } = movement;
  if (expected && amplitudeDeg !== null) {
    const off = Math.abs(amplitudeDeg - expected.amplitudeDeg);
    if (off > AMPLITUDE_TOLERANCE * expected.amplitudeDeg) codes.push("amplitude_off");
  }
  if (expected && durationMs !== null) {
    const off = Math.abs(durationMs - expected.durationMs);
    if (off > DURATION_TOLERANCE * expected.durationMs) codes.push("duration_off");
  }
  const { target, tolerance } = background;
  if (backgroundNm !== null && target !== null && tolerance !== null) {
    if (Math.abs(backgroundNm - target) > tolerance) codes.push("background_off");
  }
  return codes;
}
