import { describe, expect, it } from "vitest";
import {
  minimumJerk,
  minimumJerkPeakAcceleration,
  minimumJerkPeakVelocity,
} from "#app/engine/math/minimum-jerk.ts";
import { readFixture } from "../../../tests/support/read-fixture.ts";

const { minimum_jerk: ramp, exact_transient: transient } = readFixture<{
  minimum_jerk: {
    A_rad: number;
    T_s: number;
    peak_velocity: number;
    peak_acceleration: number;
    peak_acceleration_at_s: number[];
    times_to_threshold_s: Record<string, number>;
    t: number[];
    theta_rad: number[];
    omega_rad_s: number[];
    alpha_rad_s2: number[];
  };
  exact_transient: {
    fs: number;
    K: number;
    B: number;
    I: number;
    theta: number[];
    torque: number[];
  };
}>("minimum-jerk", "closed-form.json");

// Flash & Hogan 1985; extremes derived in closed form; 1e-12 of the largest.
describe("minimum-jerk ramp of 3° in 50 ms", () => {
  const at = (timeS: number) => minimumJerk(ramp.A_rad, ramp.T_s, timeS);

  it("has the quintic's position, velocity and acceleration", () => {
    ramp.t.forEach((time, i) => {
      const { position, velocity, acceleration } = at(time);
      expect(Math.abs(position - (ramp.theta_rad[i] ?? Number.NaN))).toBeLessThan(
        1e-12 * ramp.A_rad,
      );
      expect(Math.abs(velocity - (ramp.omega_rad_s[i] ?? Number.NaN))).toBeLessThan(2e-12);
      expect(Math.abs(acceleration - (ramp.alpha_rad_s2[i] ?? Number.NaN))).toBeLessThan(1.2e-10);
    });
  });

  it("peaks at 1.96350 rad/s at 25 ms and at 120.920 rad/s² at 10.566 and 39.434 ms", () => {
    expect(minimumJerkPeakVelocity(ramp.A_rad, ramp.T_s)).toBeCloseTo(1.9634954, 7);
    expect(at(0.025).velocity).toBeCloseTo(ramp.peak_velocity, 12);
    expect(minimumJerkPeakAcceleration(ramp.A_rad, ramp.T_s)).toBeCloseTo(120.91996, 5);
    ramp.peak_acceleration_at_s.forEach((s, k) => {
      expect(at(s * ramp.T_s).acceleration).toBeCloseTo(
        (k === 0 ? 1 : -1) * ramp.peak_acceleration,
        10,
      );
    });
  });

  it("reaches 5 % and 10 % of its peak velocity and 1 % and 5 % of its amplitude when it should", () => {
    const times = ramp.times_to_threshold_s;
    const share = (key: string, of: "position" | "velocity", peak: number) =>
      at(times[key] ?? Number.NaN)[of] / peak;
    expect(share("velocity 5 % of peak", "velocity", ramp.peak_velocity)).toBeCloseTo(0.05, 9);
    expect(share("velocity 10 % of peak", "velocity", ramp.peak_velocity)).toBeCloseTo(0.1, 9);
    expect(share("angle 1 % of A", "position", ramp.A_rad)).toBeCloseTo(0.01, 9);
    expect(share("angle 5 % of A", "position", ramp.A_rad)).toBeCloseTo(0.05, 9);
  });

  it("rests before and after", () => {
    expect(at(-0.01)).toEqual({ position: 0, velocity: 0, acceleration: 0 });
    expect(at(0.06)).toEqual({ position: ramp.A_rad, velocity: 0, acceleration: 0 });
  });

  it("gives the torque of a joint with K 60, B 0.8 and I 0.012", () => {
    transient.torque.forEach((torque, i) => {
      const { position, velocity, acceleration } = at((i - 100) / transient.fs);
      const modelled = transient.K * position + transient.B * velocity + transient.I * acceleration;
      expect(Math.abs(modelled - torque)).toBeLessThan(5e-12);
    });
  });
});
