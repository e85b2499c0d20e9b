import { describe, expect, it } from "vitest";
import { firstMovement } from "#app/engine/channels/first-movement.ts";
import type { ChannelSignal, Signals } from "#app/engine/types.ts";

const RATE_HZ = 1000;
const DEG = Math.PI / 180;

/** Minimum jerk from 0 to 1 (Flash and Hogan 1985). */
function ramp(share: number): number {
  const s = Math.min(1, Math.max(0, share));
  return s ** 3 * (10 - 15 * s + 6 * s ** 2);
}

/** 3° in 50 ms at 1.5 s, back at 2.5 s, with slow sway and a spring of 40 N·m/rad. */
function signalsOf(change: {
  turn?: number;
  torque?: (angleRad: number, i: number) => number;
  angle?: (i: number) => number;
}): Signals {
  const samples = 4000;
  const { turn = 1, torque = (angle) => 40 * angle } = change;
  const moved = (i: number): number =>
    turn * 3 * DEG * (ramp((i - 1500) / 50) - ramp((i - 2500) / 50)) +
    0.1 * DEG * Math.sin(i / 700);
  const si = Float64Array.from({ length: samples }, (_, i) => (change.angle ?? moved)(i));
  const channel: ChannelSignal = {
    column: "ang",
    si,
    rawMin: 0,
    rawMax: 0,
    clippedRun: new Uint8Array(samples),
    filled: null,
    constant: false,
  };
  return {
    samples,
    rateHz: RATE_HZ,
    durationS: (samples - 1) / RATE_HZ,
    timeS: Float64Array.from(si, (_, i) => 10 + i / RATE_HZ),
    segments: [{ start: 0, end: samples }],
    gapBefore: [],
    duplicateBefore: [],
    gaps: 0,
    duplicates: 0,
    missing: 0,
    axes: [
      {
        name: "FE",
        angle: channel,
        limbAngle: null,
        torqueNm: si.map((angle, i) => torque(angle, i)),
        torqueChannels: [],
      },
    ],
    trigger: null,
    emg: [],
    flags: [],
    dialect: { encoding: "utf-8", separator: ",", decimal: ".", headerLine: 1, unitsLine: null },
  };
}

function first(change: Parameters<typeof signalsOf>[0]) {
  return firstMovement(signalsOf(change), "FE", "extension", "flexion");
}

describe("firstMovement", () => {
  it("says the direction, when it began in the file's time, and how far it went", () => {
    const found = first({});
    expect(found?.direction).toBe("extension");
    expect(Math.abs((found?.atS ?? 0) - 11.51)).toBeLessThan(0.005);
    expect(found?.amplitudeDeg).toBeGreaterThan(2.9);
    expect(found?.amplitudeDeg).toBeLessThan(3.1);
    expect(first({ turn: -1 })?.direction).toBe("flexion");
  });

  it("tells whether torque follows the angle as against a spring, so that a wrong sign shows", () => {
    expect(first({})?.torqueSign).toBe(1);
    expect(first({ turn: -1 })?.torqueSign).toBe(1);
    expect(first({ torque: (angle) => -40 * angle })?.torqueSign).toBe(-1);
    expect(first({ torque: (angle) => 5 - 40 * angle })?.torqueSign).toBe(-1);
  });

  it("does not tell a sign from a torque that is flat or has nothing to do with the movement", () => {
    expect(first({ torque: () => 2 })?.torqueSign).toBe(0);
    expect(first({ torque: (_, i) => (i % 2 === 0 ? 1 : -1) })?.torqueSign).toBe(0);
  });

  it("is not misled by a heavy limb on a soft spring that is moved fast", () => {
    // 0.15 N·m of stiffness under 0.75 N·m of inertia, as a bare wrist has it.
    const at = (i: number) => 3 * DEG * ramp((i - 1500) / 50);
    const acceleration = (i: number) => (at(i + 1) - 2 * at(i) + at(i - 1)) * RATE_HZ ** 2;
    const limb = (turned: number) => (angle: number, i: number) =>
      turned * (2.3 * angle + 0.004 * acceleration(i)) + 0.01 * Math.sin(i / 300);
    expect(first({ angle: at, torque: limb(1) })?.torqueSign).toBe(1);
    expect(first({ angle: at, torque: limb(-1) })?.torqueSign).toBe(-1);
  });

  it("does not tell a sign where the joint is not held anywhere", () => {
    const pulse = (i: number) => 3 * DEG * (ramp((i - 1500) / 12) - ramp((i - 1512) / 12));
    expect(first({ angle: pulse })?.torqueSign).toBe(0);
  });

  it("reads over missing samples", () => {
    const angle = (i: number): number =>
      i % 97 === 0 ? Number.NaN : 2 * DEG * ramp((i - 1500) / 50);
    expect(first({ angle })).toMatchObject({ direction: "extension", torqueSign: 1 });
  });

  it("finds none where nothing moves, or only slowly", () => {
    expect(first({ angle: () => 0.1 })).toBeNull();
    expect(first({ angle: (i) => DEG * Math.sin(i / 700) })).toBeNull();
  });
});
