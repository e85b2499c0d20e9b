/** A movement's position, velocity and acceleration at one time. */
export interface MovementState {
  position: number;
  velocity: number;
  acceleration: number;
}

/**
 * Minimum-jerk ramp from rest at 0 to rest at `amplitude` (Flash & Hogan 1985, J. Neurosci.
 * 5:1688): x = A (10 s³ − 15 s⁴ + 6 s⁵), s = t / D. At rest before and after.
 *
 * @param amplitude  A, in any unit; the velocity is in that unit per second
 */
export function minimumJerk(amplitude: number, durationS: number, timeS: number): MovementState {
  const s = timeS / durationS;
  if (s <= 0) return { position: 0, velocity: 0, acceleration: 0 };
  if (s >= 1) return { position: amplitude, velocity: 0, acceleration: 0 };
  const rest = 1 - s;
  return {
    position: amplitude * s * s * s * (10 + s * (6 * s - 15)),
    velocity: (amplitude / durationS) * 30 * s * s * rest * rest,
    acceleration: (amplitude / (durationS * durationS)) * 60 * s * rest * (1 - 2 * s),
  };
}

/** Peak velocity 15/8 · A / D, at D / 2. */
export function minimumJerkPeakVelocity(amplitude: number, durationS: number): number {
  return (1.875 * amplitude) / durationS;
}

/** Peak acceleration 10/√3 · A / D², at (3 ∓ √3) / 6 · D. */
export function minimumJerkPeakAcceleration(amplitude: number, durationS: number): number {
  return ((10 / Math.sqrt(3)) * amplitude) / (durationS * durationS);
}
