import { describe, expect, it } from "vitest";
import {
  fitFlags,
  isCoarse,
  isNearEdge,
  isPastReflexLimit,
  modelFlags,
} from "#app/engine/fit/fit-flags.ts";
import { fitModel, impedanceModel } from "#app/engine/fit/fit-model.ts";
import { movementFlags } from "#app/engine/fit/movement-flags.ts";
import { hasLateResidual, qualityOf } from "#app/engine/fit/quality.ts";
import { sharesOf } from "#app/engine/fit/share.ts";
import type { FittedModel, ModelFit, WindowColumns } from "#app/engine/types.ts";
import { windowSpan } from "#app/engine/windows/window-span.ts";

/** Eight samples of columns that are far from dependent. */
function columnsOf(
  torqueOf: (theta: number, omega: number, alpha: number) => number,
): WindowColumns {
  const angleRad = Float64Array.of(1, 2, 3, 4, 5, 6, 7, 8);
  const velocityRadPerS = Float64Array.of(1, -1, 1, -1, 2, -2, 1, 0);
  const accelerationRadPerS2 = Float64Array.of(0, 3, 0, -3, 1, 1, 0, 5);
  const torqueNm = angleRad.map((theta, i) =>
    torqueOf(theta, velocityRadPerS[i] as number, accelerationRadPerS2[i] as number),
  );
  return { angleRad, velocityRadPerS, accelerationRadPerS2, torqueNm };
}

function fitted(fit: ModelFit): FittedModel {
  if (fit.status !== "fitted") throw new Error(fit.status);
  return fit;
}

const model = (changes: Partial<Parameters<typeof impedanceModel>[0]> = {}) =>
  impedanceModel({ terms: ["K", "B", "I"], fixed: {}, nonnegative: false, ...changes });

describe("the model T = K θ + B ω + I α", () => {
  const exact = columnsOf((theta, omega, alpha) => 40 * theta + 0.5 * omega + 0.01 * alpha);

  it("returns exact terms", () => {
    const { parameters, residualNm } = fitted(fitModel(exact, model()));
    expect(parameters.K).toBeCloseTo(40, 12);
    expect(parameters.B).toBeCloseTo(0.5, 12);
    expect(parameters.I).toBeCloseTo(0.01, 12);
    expect(Math.max(...residualNm.map(Math.abs))).toBeLessThan(1e-12);
  });

  it("gives a fixed term's torque away before it fits the rest", () => {
    const { parameters } = fitted(fitModel(exact, model({ fixed: { I: 0.01 } })));
    expect(parameters).toMatchObject({ I: 0.01 });
    expect(parameters.K).toBeCloseTo(40, 12);
  });

  it("leaves an absent term null", () => {
    const { parameters, covarianceTerms } = fitted(fitModel(exact, model({ terms: ["B", "K"] })));
    expect(parameters.I).toBeNull();
    expect(covarianceTerms).toEqual(["K", "B"]);
  });

  it("holds a term at 0 where it is bounded, and fits the rest again", () => {
    const columns = columnsOf((theta, omega) => 40 * theta - 3 * omega);
    const bounded = fitted(fitModel(columns, model({ nonnegative: true })));
    expect(bounded.bound).toContain("B");
    expect(bounded.parameters.B).toBe(0);
    const without = fitted(fitModel(columns, model({ terms: ["K", "I"], nonnegative: true })));
    expect(bounded.parameters.K).toBeCloseTo(without.parameters.K ?? 0, 12);
  });

  it("is too short under 2 samples a free term, singular where columns depend on each other", () => {
    const cut = (n: number): WindowColumns => ({
      angleRad: exact.angleRad.slice(0, n),
      velocityRadPerS: exact.velocityRadPerS.slice(0, n),
      accelerationRadPerS2: exact.accelerationRadPerS2.slice(0, n),
      torqueNm: exact.torqueNm.slice(0, n),
    });
    expect(fitModel(cut(5), model()).status).toBe("too_short");
    expect(fitModel(cut(6), model()).status).toBe("fitted");
    const twice = { ...exact, velocityRadPerS: exact.angleRad.map((x) => 2 * x) };
    expect(fitModel(twice, model()).status).toBe("singular");
    expect(fitModel(twice, model({ nonnegative: true })).status).toBe("singular");
  });

  it("is singular where a value leaves the range of numbers", () => {
    const huge = { ...exact, angleRad: exact.angleRad.map((x) => 1e200 * x) };
    expect(fitModel(huge, model()).status).toBe("singular");
    expect(fitModel(exact, model({ fixed: { K: 1e308 } })).status).toBe("singular");
  });

  it("shares are largest torques over their sum", () => {
    // Largest |θ|, |ω|, |α|: 8, 2, 5.
    expect(sharesOf(exact, { K: 1, B: -2, I: 0.8 })).toEqual({ K: 0.5, B: 0.25, I: 0.25 });
    expect(sharesOf(exact, { K: 1, B: null, I: null })).toEqual({ K: 1, B: null, I: null });
    expect(sharesOf(exact, { K: 0, B: null, I: null })).toEqual({ K: null, B: null, I: null });
  });
});

describe("quality", () => {
  it("has both VAFs, the RMS over n and the lag-1 autocorrelation", () => {
    const quality = qualityOf(Float64Array.of(1, 2, 3, 4), Float64Array.of(1, 0, 1, 0));
    // Variances 1.25 and 0.25; sums of squares 30 and 2; deviations ½, −½, ½, −½.
    expect(quality.vaf_pct).toBeCloseTo(80, 12);
    expect(quality.vaf_uncentred_pct).toBeCloseTo(100 * (1 - 2 / 30), 12);
    expect(quality.rms_residual).toBeCloseTo(Math.sqrt(0.5), 12);
    expect(quality.lag1).toBeCloseTo(-0.75, 12);
  });

  it("is not defined for a torque that does not vary", () => {
    expect(qualityOf(Float64Array.of(2, 2), Float64Array.of(0, 0))).toMatchObject({
      vaf_pct: null,
      vaf_uncentred_pct: 100,
      lag1: null,
    });
    expect(qualityOf(Float64Array.of(0, 0), Float64Array.of(0, 0)).vaf_uncentred_pct).toBeNull();
  });

  it("a residual is late where its last quarter's RMS is over twice that of the rest", () => {
    expect(hasLateResidual(Float64Array.of(1, 1, 1, 1, 1, 1, 2.1, -2.1))).toBe(true);
    expect(hasLateResidual(Float64Array.of(1, 1, 1, 1, 1, 1, 2, -2))).toBe(false);
  });
});

describe("flags", () => {
  const base: FittedModel = {
    status: "fitted",
    parameters: { K: 1, B: 1, I: 1 },
    bound: [],
    conditionNumber: 5,
    covarianceUnscaled: new Float64Array(0),
    covarianceTerms: [],
    modelledNm: new Float64Array(0),
    residualNm: new Float64Array(0),
  };

  it("a good fit has none; each limit is its own", () => {
    expect(fitFlags(base, model(), 90)).toEqual([]);
    expect(fitFlags(base, model(), 89.9)).toEqual(["low_vaf"]);
    expect(fitFlags({ ...base, parameters: { K: 1, B: -1, I: 1 } }, model(), 99)).toEqual([
      "non_physical_sign",
    ]);
    const conditions = [30, 30.1, 100, 100.1].flatMap((conditionNumber) =>
      fitFlags({ ...base, conditionNumber }, model(), null),
    );
    expect(conditions).toEqual(["weakly_conditioned", "weakly_conditioned", "ill_conditioned"]);
    expect(fitFlags({ ...base, bound: ["B"] }, model(), null)).toEqual(["bound_active"]);
  });

  it("the model's own: fixed and absent terms; a fixed value below 0 is the person's", () => {
    expect(modelFlags(model({ fixed: { I: -1 } }))).toEqual(["fixed"]);
    expect(modelFlags(model({ terms: ["K"] }))).toEqual(["term_absent"]);
    const fixed = { ...base, parameters: { K: 1, B: 1, I: -1 } };
    expect(fitFlags(fixed, model({ fixed: { I: -1 } }), 99)).toEqual(["fixed"]);
  });

  it("the reach of a zero-phase filter counts towards the reflex limit", () => {
    const filter = { family: "butterworth" as const, order: 2, cutoff_hz: 50 };
    expect(isPastReflexLimit(40, filter, 50)).toBe(false);
    expect(isPastReflexLimit(40.1, filter, 50)).toBe(true);
    expect(isPastReflexLimit(50, null, 50)).toBe(false);
    expect(isPastReflexLimit(50, { ...filter, cutoff_hz: 400 }, 50)).toBe(false);
  });

  it("20 samples in a period of the cut-off are not coarse, also at a rate measured a hair below", () => {
    const filter = { family: "butterworth" as const, order: 2, cutoff_hz: 50 };
    expect([1000, 999.9999999, 999].map((rateHz) => isCoarse(filter, rateHz))).toEqual([
      false,
      false,
      true,
    ]);
  });

  it("a span is near an edge within one period of the cut-off", () => {
    const filter = { family: "butterworth" as const, order: 2, cutoff_hz: 20 };
    const span = windowSpan(200, [0, 100], [-50, 0], 1000);
    const near = (start: number, end: number) => isNearEdge(span, [{ start, end }], filter, 1000);
    expect([near(100, 351), near(101, 351), near(100, 350)]).toEqual([false, true, true]);
    expect(isNearEdge(span, [{ start: 149, end: 302 }], null, 1000)).toBe(false);
  });

  it("the movement's: only against what is expected, the background only against a target", () => {
    const movement = {
      sign: 1 as const,
      amplitudeDeg: 3.7,
      durationMs: 130,
      peakVelocityRadPerS: 1,
    };
    const expected = { amplitudeDeg: 3, durationMs: 100 };
    const none = { target: null, tolerance: null };
    expect(movementFlags(movement, expected, 1, none)).toEqual(["amplitude_off", "duration_off"]);
    expect(movementFlags(movement, null, 1, none)).toEqual([]);
    const background = { target: 0, tolerance: 0.5 };
    expect(movementFlags(movement, null, -0.6, background)).toEqual(["background_off"]);
    expect(movementFlags(movement, null, null, background)).toEqual([]);
  });
});
