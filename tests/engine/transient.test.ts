import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { seededRandom } from "#app/engine/math/random.ts";
import { analyze, findWindows, prepare, viewWindow } from "#app/engine/pipeline.ts";
import type { Result, Signals, TransientProtocol, WindowsDocument } from "#app/engine/types.ts";
import type { MadeRecording, ProtocolChanges, Ramp } from "../support/made-signals.ts";
import { joint, makeAxis, makeProtocol, makeSignals, rampsAt } from "../support/made-signals.ts";
import { analyzeOne, codesOf, onlyWindow } from "../support/transient-case.ts";

const TRUE = { K: 40, B: 0.45, I: 0.01 };
const RATE = 1000;

/** Six perturbations, up and down in turn, every 1.2 s from 1 s on. */
const SIX: Ramp[] = [0, 1, 2, 3, 4, 5].map((k) => ({
  atS: 1 + 1.2 * k,
  amplitudeDeg: k % 2 === 0 ? 3 : -3,
  durationMs: 100,
}));

interface Settings {
  ramps?: Ramp[];
  stiffness?: (timeS: number) => number;
  scale?: number;
  sign?: number;
  noiseNm?: number;
  noiseDeg?: number;
  extraNm?: (timeS: number) => number;
  more?: Partial<MadeRecording>;
}

function recording(settings: Settings = {}) {
  const { ramps = SIX, scale = 1, sign = 1, noiseNm = 0, noiseDeg = 0, extraNm } = settings;
  const random = seededRandom(7);
  // Sum of twelve uniform numbers: close to normal.
  const normal = () => {
    let sum = -6;
    for (let i = 0; i < 12; i++) sum += random.nextUint32() / 2 ** 32;
    return sum;
  };
  const move = (t: number) => {
    const { theta, omega, alpha } = rampsAt(ramps, t);
    return { theta: sign * theta, omega: sign * omega, alpha: sign * alpha };
  };
  const stiffness = settings.stiffness ?? (() => TRUE.K);
  return makeSignals({
    rateHz: RATE,
    durationS: 8.5,
    axes: [
      {
        move: (t) => {
          const state = move(t);
          return { ...state, theta: state.theta + (noiseDeg * Math.PI * normal()) / 180 };
        },
        torque: (t) =>
          scale *
          sign *
          (joint((s) => rampsAt(ramps, s), { ...TRUE, K: stiffness(t) }, 1)(t) +
            noiseNm * normal() +
            (extraNm?.(t) ?? 0)),
      },
    ],
    ...settings.more,
  });
}

const analyzed = (settings: Settings = {}, changes: ProtocolChanges = {}) =>
  analyzeOne(recording(settings), makeProtocol(changes));

const estimates = (result: Result) =>
  result.pooled.map(({ K, B, I }) => [K.estimate ?? 0, B.estimate ?? 0, I.estimate ?? 0]);

describe("the physics holds", () => {
  const settings: Settings = { noiseNm: 0.05, noiseDeg: 0.001 };
  const base = analyzed(settings);

  it("double the torque, double K, B and I", () => {
    const doubled = estimates(analyzed({ ...settings, scale: 2 })).flat();
    estimates(base)
      .flat()
      .forEach((value, i) => {
        expect((doubled[i] ?? 0) / value).toBeCloseTo(2, 9);
      });
  });

  it("both signs turned: the same K, B and I, the directions swapped", () => {
    const turned = analyzed({ ...settings, sign: -1 });
    const of = (result: Result, direction: string) =>
      result.pooled.find((pooled) => pooled.direction === direction);
    for (const [here, there] of [
      ["up", "down"],
      ["down", "up"],
    ] as const) {
      // The noise turns with the torque but not with the angle, hence not to the last digit.
      const ratio = (of(turned, there)?.K.estimate ?? 0) / (of(base, here)?.K.estimate ?? 1);
      expect(ratio).toBeCloseTo(1, 2);
    }
    const quiet = analyzed({ noiseNm: 0.05, sign: -1 });
    const straight = analyzed({ noiseNm: 0.05 });
    expect(of(quiet, "down")?.K.estimate).toBeCloseTo(of(straight, "up")?.K.estimate ?? 0, 9);
  });

  it("a clock that starts elsewhere changes the stamps of onsets and nothing else", () => {
    fc.assert(
      fc.property(fc.integer({ min: -100_000, max: 100_000 }), (startS) => {
        const shifted = recording(settings);
        shifted.timeS = shifted.timeS.map((t) => t + startS);
        const result = analyzeOne(shifted, makeProtocol());
        result.windows.forEach((window, i) => {
          const before = base.windows[i];
          expect(window.onset_s - startS).toBeCloseTo(before?.onset_s ?? 0, 6);
          expect({ ...window, onset_s: 0 }).toEqual({ ...before, onset_s: 0 });
        });
        expect(result.pooled).toEqual(base.pooled);
      }),
      { numRuns: 5 },
    );
  });

  it("an offset of angle and torque changes nothing but the background torque", () => {
    const moved = recording({ noiseNm: 0.05 });
    const [axis] = moved.axes;
    if (!axis) throw new Error("no axis");
    axis.angle.si = axis.angle.si.map((x) => x + 0.3);
    axis.torqueNm = axis.torqueNm.map((x) => x + 5);
    const result = analyzeOne(moved, makeProtocol());
    const plain = analyzed({ noiseNm: 0.05 });
    estimates(result)
      .flat()
      .forEach((value, i) => {
        expect(value / (estimates(plain).flat()[i] ?? 0)).toBeCloseTo(1, 7);
      });
    expect(result.windows[0]?.background_torque).toBeCloseTo(
      (plain.windows[0]?.background_torque ?? 0) + 5,
      9,
    );
  });

  it("the same input gives the same bytes, all of them numbers or null", () => {
    const text = JSON.stringify(base);
    expect(JSON.stringify(analyzed(settings))).toBe(text);
    const walk = (value: unknown): void => {
      if (typeof value === "number") expect(Number.isFinite(value)).toBe(true);
      else if (value !== null && typeof value === "object") Object.values(value).forEach(walk);
    };
    walk(base);
  });
});

describe("the rig", () => {
  const rig = { K: 3, B: 0.05, I: 0.004 };
  const move = (t: number) => rampsAt(SIX, t);
  const together = { K: TRUE.K + rig.K, B: TRUE.B + rig.B, I: TRUE.I + rig.I };
  const make = (values: typeof rig) =>
    makeSignals({ rateHz: RATE, durationS: 8.5, axes: [{ move, torque: joint(move, values) }] });

  it("is fitted from its empty recordings, both directions stacked, and taken out", () => {
    const result = analyzeOne(make(together), makeProtocol(), { rig: [make(rig)] });
    expect(result.rig.A0?.K).toBeCloseTo(rig.K, 2);
    expect(result.rig.A0?.I).toBeCloseTo(rig.I, 5);
    expect(result.rig.A0?.K_sd).toBeLessThan(1e-3);
    expect(result.pooled[0]?.K.estimate).toBeCloseTo(TRUE.K, 2);
    expect(result.pooled[0]?.I.estimate).toBeCloseTo(TRUE.I, 5);
    expect(codesOf(result.pooled[0] ?? { flags: [] })).not.toContain("rig_not_removed");
  });

  it("is fitted with three free terms whatever the model says", () => {
    const model: TransientProtocol["model"] = {
      terms: ["K", "B"],
      fixed: { B: 0.4 },
      nonnegative: true,
    };
    const result = analyzeOne(make(together), makeProtocol({ model }), { rig: [make(rig)] });
    expect(result.rig.A0?.I).toBeCloseTo(rig.I, 5);
  });

  it("that no empty recording moves keeps the protocol's values, and is flagged where they are 0", () => {
    const still = makeSignals({
      rateHz: RATE,
      durationS: 3,
      axes: [{ move: (t) => rampsAt([], t), torque: () => 0 }],
    });
    const result = analyzeOne(make(together), makeProtocol(), { rig: [still] });
    expect(result.rig.A0).toEqual({ K: 0, B: 0, I: 0, K_sd: null, B_sd: null, I_sd: null });
    expect(codesOf(result.pooled[0] ?? { flags: [] })).toContain("rig_not_removed");
  });

  it("as the protocol states it is taken out by linearity to the last digits", () => {
    const plain = analyzeOne(make(together), makeProtocol());
    const removed = analyzeOne(make(together), makeProtocol({ rig: { A0: rig } }));
    expect(removed.rig.A0).toEqual({ ...rig, K_sd: null, B_sd: null, I_sd: null });
    expect((plain.windows[0]?.K ?? 0) - (removed.windows[0]?.K ?? 0)).toBeCloseTo(rig.K, 9);
    expect(codesOf(plain.pooled[0] ?? { flags: [] })).toContain("rig_not_removed");
    expect(codesOf(removed.pooled[0] ?? { flags: [] })).not.toContain("rig_not_removed");
    expect(removed.windows[0]?.background_torque).toBe(plain.windows[0]?.background_torque);
  });
});

describe("the model", () => {
  const modelled = (model: TransientProtocol["model"], settings: Settings = {}) =>
    analyzed(settings, { model, rig: { K: 1, B: 0, I: 0 } });

  it("a fixed term comes back as given, without intervals, and is flagged", () => {
    const fixed = { I: TRUE.I };
    const { pooled, windows } = modelled({ terms: ["K", "B", "I"], fixed, nonnegative: false });
    expect(pooled[0]?.I).toEqual({
      estimate: TRUE.I,
      window_mean: null,
      window_sd: null,
      t: null,
      bootstrap: null,
    });
    expect(pooled[0]?.K.estimate).toBeCloseTo(TRUE.K - 1, 2);
    expect(pooled[0]?.correlation?.[2]).toEqual([0, 0, 1]);
    expect(codesOf(pooled[0] ?? { flags: [] })).toContain("fixed");
    expect(windows[0]?.I).toBe(TRUE.I);
  });

  it("a term that is absent is null and flagged", () => {
    const { pooled, windows } = modelled({ terms: ["K", "B"], fixed: {}, nonnegative: false });
    expect(pooled[0]?.I.estimate).toBeNull();
    expect(pooled[0]?.share.I).toBeNull();
    expect(windows[0]?.I).toBeNull();
    expect(codesOf(windows[0] ?? { flags: [] })).toContain("term_absent");
  });

  it("a negative value stays with a flag, and is 0 with a flag where the model is bounded", () => {
    const soft: Settings = { stiffness: () => -5 };
    const terms: TransientProtocol["model"]["terms"] = ["K", "B", "I"];
    const free = modelled({ terms, fixed: {}, nonnegative: false }, soft);
    expect(free.pooled[0]?.K.estimate).toBeCloseTo(-6, 2);
    expect(codesOf(free.pooled[0] ?? { flags: [] })).toContain("non_physical_sign");
    const bounded = modelled({ terms, fixed: {}, nonnegative: true }, soft);
    expect(bounded.pooled[0]?.K.estimate).toBe(0);
    expect(bounded.pooled[0]?.K.bootstrap).toEqual([0, 0]);
    expect(codesOf(bounded.pooled[0] ?? { flags: [] })).toContain("bound_active");
    expect(codesOf(bounded.windows[0] ?? { flags: [] })).toContain("bound_active");
  });

  it("bounds that do not bind change nothing", () => {
    const terms: TransientProtocol["model"]["terms"] = ["K", "B", "I"];
    const free = modelled({ terms, fixed: {}, nonnegative: false }, { noiseNm: 0.05 });
    const bounded = modelled({ terms, fixed: {}, nonnegative: true }, { noiseNm: 0.05 });
    expect(estimates(bounded)).toEqual(estimates(free));
    expect(bounded.pooled[0]?.lag_estimate_ms).toBeCloseTo(
      free.pooled[0]?.lag_estimate_ms ?? Number.NaN,
      6,
    );
  });
});

describe("pooling", () => {
  it("one window gives an estimate without intervals", () => {
    const { pooled } = analyzed({ ramps: SIX.slice(0, 1) });
    expect(pooled).toHaveLength(1);
    expect(pooled[0]).toMatchObject({ windows: 1, order_lag1: null });
    expect(pooled[0]?.K).toMatchObject({ window_sd: null, t: null, bootstrap: null });
    expect(pooled[0]?.K.estimate).toBeCloseTo(TRUE.K, 2);
    expect(codesOf(pooled[0] ?? { flags: [] })).toContain("too_few_windows");
  });

  it("no window that is included gives an entry of nulls", () => {
    const windows: WindowsDocument = {
      version: 1,
      windows: [
        {
          recording_sha256: "recording",
          axis: "A0",
          onset_s: 1,
          window_ms: [0, 100],
          included: false,
          reason: "A cough.",
        },
      ],
    };
    const { pooled } = analyzeOne(recording(), makeProtocol(), { windows });
    expect(pooled).toHaveLength(1);
    const nothing = {
      estimate: null,
      window_mean: null,
      window_sd: null,
      t: null,
      bootstrap: null,
    };
    expect(pooled[0]).toMatchObject({
      direction: "up",
      windows: 0,
      K: nothing,
      vaf_pct: null,
      lag_estimate_ms: null,
      correlation: null,
      ensemble: { K: null, B: null, I: null, vaf_pct: null },
      share: { K: null, B: null, I: null },
    });
  });

  it("recordings of one call are pooled in their order, those of other rates without a mean trace", () => {
    const slower = makeSignals({
      rateHz: 800,
      durationS: 8.5,
      axes: [{ move: (t) => rampsAt(SIX, t), torque: joint((t) => rampsAt(SIX, t), TRUE) }],
    });
    const of = (second: Signals) =>
      analyze({
        protocol: makeProtocol(),
        protocolSha256: "protocol",
        recordings: [
          { file: "1.csv", sha256: "1", signals: recording({ noiseNm: 0.05 }) },
          { file: "2.csv", sha256: "2", signals: second },
        ],
        rig: [],
        windows: null,
      });
    const together = of(recording());
    expect(together.windows.map((window) => window.recording)).toEqual([
      ...Array(6).fill(0),
      ...Array(6).fill(1),
    ]);
    expect(together.pooled[0]).toMatchObject({ windows: 6 });
    expect(together.pooled[0]?.ensemble.K).toBeCloseTo(together.pooled[0]?.K.estimate ?? 0, 1);
    const mixed = of(slower).pooled[0];
    expect(mixed?.K.estimate).toBeCloseTo(TRUE.K, 0);
    expect(mixed?.ensemble).toEqual({ K: null, B: null, I: null, vaf_pct: null });
    expect(mixed?.lag_estimate_ms).toBeNull();
  });

  it("estimates that follow their order are flagged as related", () => {
    const ramps = [...Array(24).keys()].map((k) => ({
      atS: 1 + 0.7 * k,
      amplitudeDeg: 1,
      durationMs: 100,
    }));
    const result = analyzed({ ramps, stiffness: (t) => 30 + t, more: { durationS: 18.5 } }, {});
    expect(result.pooled[0]?.windows).toBe(24);
    expect(result.pooled[0]?.order_lag1).toBeGreaterThan(0.8);
    expect(codesOf(result.pooled[0] ?? { flags: [] })).toContain("windows_related");
  });

  it("entries stand by axis, then direction, in code-unit order, windows by axis in protocol order", () => {
    const move = (t: number) => rampsAt(SIX, t);
    const axes = ["b", "B"].map((name) => ({ name, move, torque: joint(move, TRUE) }));
    const signals = makeSignals({ rateHz: RATE, durationS: 8.5, axes });
    const result = analyzeOne(
      signals,
      makeProtocol({
        axes: [
          makeAxis("b", { positive: "z", negative: "Z" }),
          makeAxis("B", { positive: "extension", negative: "flexion" }),
        ],
      }),
    );
    expect(result.pooled.map(({ axis, direction }) => [axis, direction])).toEqual([
      ["B", "extension"],
      ["B", "flexion"],
      ["b", "Z"],
      ["b", "z"],
    ]);
    expect([...new Set(result.windows.map(({ axis }) => axis))]).toEqual(["b", "B"]);
  });

  it("the robustness surface holds the main fit where its window and cut-off are the main one's", () => {
    const result = analyzed(
      { noiseNm: 0.05 },
      { robustness: { window_end_ms: [60, 100, 1500], cutoff_hz: [20, 50, 600] } },
    );
    const [pooled] = result.pooled;
    const surface = pooled?.robustness ?? [];
    expect(surface.map(({ window_end_ms, cutoff_hz }) => [window_end_ms, cutoff_hz])).toEqual(
      [60, 100, 1500].flatMap((end) => [20, 50, 600].map((cutoff) => [end, cutoff])),
    );
    expect(surface[3]).toMatchObject({ K: pooled?.K.estimate, I: pooled?.I.estimate });
    expect(Math.abs((surface[1]?.K ?? 0) / TRUE.K - 1)).toBeLessThan(0.05);
    // 1.5 s reach the next onset; 600 Hz are over half the rate.
    for (const i of [2, 5, 6, 7, 8]) expect(surface[i]?.K).toBeNull();
    expect(
      analyzed({}, { filter: null, robustness: { window_end_ms: [60], cutoff_hz: [20] } }).pooled[0]
        ?.robustness,
    ).toHaveLength(1);
  });

  it("a window end that leaves too few samples for the terms gives null on the robustness surface", () => {
    const { pooled } = analyzed({}, { robustness: { window_end_ms: [4, 5], cutoff_hz: [20] } });
    // At 1 kHz 0 to 4 ms are five samples, 0 to 5 ms six: two for each of three terms.
    expect(pooled[0]?.robustness?.[0]?.K).toBeNull();
    expect(pooled[0]?.robustness?.[1]?.K).not.toBeNull();
  });
});

describe("late torque and the reflex limit", () => {
  // 1 N·m that begins 60 ms after each onset, rises within 10 ms and lasts to 160 ms.
  const reflex = (t: number) => {
    const after = SIX.map(({ atS }) => t - atS).find((s) => s > 0.06 && s < 0.16);
    const sign = Math.floor((t - 1) / 1.2) % 2 === 0 ? 1 : -1;
    return after === undefined ? 0 : sign * (1 - Math.exp(-(after - 0.06) / 0.01));
  };
  const short: ProtocolChanges = {
    filter: { family: "butterworth", order: 2, cutoff_hz: 100 },
    window_ms: [0, 40],
    reflex_limit_ms: 50,
  };

  it("is measured against the model carried on from a window before the limit", () => {
    const { pooled, windows } = analyzed({ extraNm: reflex, noiseNm: 0.002 }, short);
    const up = pooled.find(({ direction }) => direction === "up");
    expect(codesOf(windows[0] ?? { flags: [] })).not.toContain("past_reflex_limit");
    expect(up?.K.estimate).toBeCloseTo(TRUE.K, 0);
    const onsetMs = ((windows[0]?.onset_s ?? 0) - 1) * 1000;
    expect(up?.late?.latency_ms).toBeGreaterThan(54 - onsetMs);
    expect(up?.late?.latency_ms).toBeLessThan(66 - onsetMs);
    expect(up?.late?.peak).toBeCloseTo(1, 0);
    expect(up?.late?.impulse).toBeCloseTo(0.09, 2);
    const theta = (3 * Math.PI) / 180;
    expect(up?.late?.apparent_stiffness).toBeCloseTo((up?.late?.peak ?? 0) / theta, 0);
  });

  it("is seen as far as all windows reach, also the one that a gap cuts off", () => {
    const peakMs = (gapS: number) => {
      const { pooled, windows } = analyzed(
        { extraNm: reflex, more: { gapBefore: [{ sample: gapS * RATE, seconds: 0.01 }] } },
        short,
      );
      const up = pooled.find(({ direction }) => direction === "up");
      expect([windows.length, up?.windows]).toEqual([6, 3]);
      return [up?.late?.peak_ms ?? null, up?.late?.impulse ?? null];
    };
    // The first window begins about 1.006 s; two samples before a gap have no derivative.
    const [peak] = peakMs(1.08);
    expect(peak).toBeGreaterThan(60);
    expect(peak).toBeLessThan(1078 - 1000);
    const [whole] = peakMs(1.6);
    expect(whole).toBeGreaterThan(1078 - 1000);
    expect(peakMs(1.049)).toEqual([null, null]);
  });

  it("is not defined for a window that reaches the limit, whose K it spoils", () => {
    const { pooled, windows } = analyzed({ extraNm: reflex }, { ...short, window_ms: [0, 100] });
    const up = pooled.find(({ direction }) => direction === "up");
    expect(up?.late).toBeNull();
    expect(codesOf(windows[0] ?? { flags: [] })).toContain("past_reflex_limit");
    expect(codesOf(up ?? { flags: [] })).toContain("past_reflex_limit");
    expect(Math.abs((up?.K.estimate ?? 0) / TRUE.K - 1)).toBeGreaterThan(0.2);
    expect(up?.vaf_pct).toBeGreaterThan(95);
  });

  it("the filter carries later torque back: 750 / cut-off − 5 ms before the limit are flagged", () => {
    const flagged = (windowEndMs: number, cutoffHz: number | null) => {
      const filter = cutoffHz
        ? { family: "butterworth" as const, order: 2, cutoff_hz: cutoffHz }
        : null;
      const { windows } = analyzed(
        { ramps: SIX.slice(0, 1) },
        { filter, window_ms: [0, windowEndMs] },
      );
      return codesOf(windows[0] ?? { flags: [] }).includes("past_reflex_limit");
    };
    expect([flagged(40, 50), flagged(41, 50)]).toEqual([false, true]);
    expect([flagged(17, 20), flagged(18, 20)]).toEqual([false, true]);
    expect([flagged(50, 150), flagged(51, 150)]).toEqual([false, true]);
    expect([flagged(50, null), flagged(51, null)]).toEqual([false, true]);
  });
});

describe("flags of a window", () => {
  const flagsOf = (settings: Settings, changes: ProtocolChanges = {}) =>
    codesOf(onlyWindow(analyzed({ ramps: SIX.slice(0, 1), ...settings }, changes)));
  const filter = (cutoffHz: number) => ({
    filter: { family: "butterworth" as const, order: 2, cutoff_hz: cutoffHz },
  });

  it("a clean window within the limit has none", () => {
    expect(flagsOf({}, { reflex_limit_ms: 140 })).toEqual([]);
  });

  it("expectations: amplitude over 20 %, duration over 25 % off", () => {
    const onset = { expected_amplitude_deg: 3, expected_duration_ms: 100 };
    const codes = (amplitudeDeg: number, durationMs: number) =>
      flagsOf({ ramps: [{ atS: 1, amplitudeDeg, durationMs }] }, { onset }).filter((code) =>
        code.endsWith("_off"),
      );
    expect(codes(3, 100)).toEqual([]);
    expect(codes(3.7, 100)).toEqual(["amplitude_off"]);
    expect(codes(3, 150)).toEqual(["duration_off"]);
  });

  it("background torque off its target, never without one", () => {
    const codes = (target: number | null, tolerance: number | null) =>
      flagsOf({}, { background: { target, tolerance } });
    expect(codes(2, 0.5)).toContain("background_off");
    expect(codes(1.2, 0.5)).not.toContain("background_off");
    expect(codes(null, 0.5)).not.toContain("background_off");
  });

  it("fewer than 20 samples in one period of the cut-off", () => {
    expect(flagsOf({}, filter(60))).toContain("coarse_sampling");
    expect(flagsOf({}, filter(50))).not.toContain("coarse_sampling");
    expect(flagsOf({}, { filter: null })).not.toContain("coarse_sampling");
  });

  it("a span within one period of the cut-off to a stretch's end", () => {
    const near: Settings = { more: { durationS: 1.14 } };
    expect(flagsOf(near)).toContain("near_edge");
    expect(flagsOf(near, { filter: null })).not.toContain("near_edge");
    expect(flagsOf({})).not.toContain("near_edge");
  });

  it("a residual that grows in the last quarter", () => {
    const kick = (t: number) => (t > 1.09 ? (t - 1.09) * 40 : 0);
    expect(flagsOf({ extraNm: kick }, filter(100))).toContain("late_residual");
  });

  it("low VAF and a poor condition", () => {
    expect(flagsOf({ noiseNm: 3 })).toContain("low_vaf");
    expect(flagsOf({}, { window_ms: [0, 40] })).toContain("weakly_conditioned");
    expect(flagsOf({}, { window_ms: [0, 20] })).toContain("ill_conditioned");
  });

  it("noise in the angle that pulls I to 0", () => {
    const noisy = onlyWindow(analyzed({ ramps: SIX.slice(0, 1), noiseDeg: 0.02 }, filter(100)));
    expect(codesOf(noisy)).toContain("angle_noise");
    expect(noisy.I).toBeLessThan(0.97 * TRUE.I);
    expect(flagsOf({ noiseDeg: 0.001 }, filter(20))).not.toContain("angle_noise");
  });

  it("a channel that is clipped while the joint moves, not one that is held", () => {
    const clipped = makeSignals({
      rateHz: RATE,
      durationS: 3,
      axes: [
        {
          move: (t) => rampsAt(SIX.slice(0, 1), t),
          torque: (t) => Math.min(1.5, joint((s) => rampsAt(SIX.slice(0, 1), s), TRUE)(t)),
        },
      ],
    });
    const codes = codesOf(onlyWindow(analyzeOne(clipped, makeProtocol())));
    expect(codes).toContain("clipped_channel");
    expect(flagsOf({})).not.toContain("clipped_channel");
  });

  it("a sample that was filled in the span", () => {
    const signals = recording({ ramps: SIX.slice(0, 1) });
    const [axis] = signals.axes;
    if (!axis) throw new Error("no axis");
    axis.angle.filled = new Uint8Array(signals.samples);
    axis.angle.filled[980] = 1;
    const codes = codesOf(onlyWindow(analyzeOne(signals, makeProtocol())));
    expect(codes).toContain("filled_samples");
  });

  it("slip of the limb against the rig, and its share of the movement", () => {
    const slipping = (share: number) => {
      const move = (t: number) => rampsAt(SIX.slice(0, 1), t);
      const signals = makeSignals({
        rateHz: RATE,
        durationS: 3,
        axes: [
          {
            move,
            torque: joint(move, TRUE),
            limbAngle: (t) => (1 - share) * move(t).theta + 0.2,
          },
        ],
      });
      return onlyWindow(analyzeOne(signals, makeProtocol()));
    };
    expect(slipping(0.12).slip_pct).toBeCloseTo(12, 6);
    expect(codesOf(slipping(0.12))).toContain("slip");
    expect(slipping(0.08).slip_pct).toBeCloseTo(8, 6);
    expect(codesOf(slipping(0.08))).not.toContain("slip");
    expect(onlyWindow(analyzed({ ramps: SIX.slice(0, 1) })).slip_pct).toBeNull();
  });
});

describe("EMG", () => {
  const burst = (fromMs: number, toMs: number, height = 1e-3) => {
    const random = seededRandom(11);
    return (t: number) => {
      const noise = random.nextUint32() / 2 ** 32 - 0.5;
      const active = SIX.some(({ atS }) => (t - atS) * 1000 >= fromMs && (t - atS) * 1000 < toMs);
      return noise * (active ? height : 2e-5);
    };
  };
  const withEmg = (volts: (t: number) => number, changes: ProtocolChanges = {}) =>
    analyzed({ more: { emg: [{ muscle: "soleus", volts }] } }, changes);

  it("a burst 45 ms after the ramp's start is found when it is there, not 45 ms early", () => {
    const { windows } = withEmg(burst(45, 75));
    for (const window of windows) {
      const startMs = (window.onset_s - 1 - 1.2 * Math.round((window.onset_s - 1) / 1.2)) * 1000;
      const latency = (window.emg[0]?.latency_ms ?? Number.NaN) + startMs;
      expect(latency).toBeGreaterThanOrEqual(44);
      expect(latency).toBeLessThan(50);
      expect(window.emg[0]?.burst).toBe(true);
      expect(codesOf(window)).toContain("emg_burst");
    }
  });

  it("a burst after the window has a latency and no flag", () => {
    const { windows } = withEmg(burst(130, 160));
    expect(windows[0]?.emg[0]?.burst).toBe(false);
    expect(windows[0]?.emg[0]?.latency_ms).toBeGreaterThan(120);
    expect(codesOf(windows[0] ?? { flags: [] })).not.toContain("emg_burst");
  });

  it("no burst, no latency; the level is that of the moving RMS", () => {
    const { windows } = withEmg(burst(0, 0));
    expect(windows[0]?.emg[0]).toMatchObject({
      muscle: "soleus",
      unit: "V",
      burst: false,
      latency_ms: null,
    });
    // Uniform noise of width w has an RMS of w / √12, less what the band leaves out.
    expect(windows[0]?.emg[0]?.baseline).toBeLessThan(2e-5 / Math.sqrt(12));
    expect(windows[0]?.emg[0]?.baseline).toBeGreaterThan((0.7 * 2e-5) / Math.sqrt(12));
  });

  it("a level over twice the median of the included windows is flagged", () => {
    const { windows } = withEmg(burst(-600, -5, 6e-5), {});
    expect(windows.flatMap(codesOf)).not.toContain("raised_emg");
    const random = seededRandom(5);
    const once = (t: number) =>
      (random.nextUint32() / 2 ** 32 - 0.5) * (t > 2.9 && t < 3.6 ? 8e-5 : 2e-5);
    const raised = withEmg(once).windows.map((window) => codesOf(window).includes("raised_emg"));
    expect(raised).toEqual([false, false, true, false, false, false]);
  });
});

describe("one window's view", () => {
  const random = seededRandom(3);
  const signals = recording({
    noiseNm: 0.05,
    noiseDeg: 0.002,
    more: { emg: [{ muscle: "soleus", volts: () => random.nextUint32() / 2 ** 42 }] },
  });
  const protocol = makeProtocol({ rig: { K: 2, B: 0.01, I: 0.001 } });
  const prepared = prepare(signals, protocol);
  const found = findWindows(prepared, protocol);

  it("has the numbers of the whole analysis", () => {
    const { windows } = analyzeOne(signals, protocol);
    expect(found.map((choice) => viewWindow(prepared, protocol, choice, found).window)).toEqual(
      windows,
    );
  });

  it("has them for a trimmed window too, and its traces add up", () => {
    const choices = found.map((choice, i) =>
      i === 2 ? { ...choice, window_ms: [3, 77] as [number, number] } : choice,
    );
    const trimmed = choices[2];
    if (!trimmed) throw new Error("no window");
    const { window, trace } = viewWindow(prepared, protocol, trimmed, choices);
    const document: WindowsDocument = {
      version: 1,
      windows: choices.map((choice) => ({ recording_sha256: "recording", ...choice })),
    };
    expect(window).toEqual(analyzeOne(signals, protocol, { windows: document }).windows[2]);
    expect(trace?.timeMs[0]).toBe(3);
    expect(trace?.timeMs.length).toBe(75);
    const { K, B, I } = trace?.termsNm ?? {};
    trace?.measuredNm.forEach((measured, i) => {
      const modelled = (K?.[i] ?? 0) + (B?.[i] ?? 0) + (I?.[i] ?? 0);
      expect(modelled).toBeCloseTo(trace.modelledNm[i] ?? Number.NaN, 12);
      expect(measured - modelled).toBeCloseTo(trace.residualNm[i] ?? Number.NaN, 12);
    });
    const shares = Object.values(trace?.share ?? {}).map((share) => share ?? 0);
    expect(shares.reduce((sum, share) => sum + share, 0)).toBeCloseTo(1, 12);
  });

  it("of a window that is set aside has no traces", () => {
    const [first] = found;
    if (!first) throw new Error("no window");
    const aside = { ...first, included: false, reason: "A cough." };
    const { window, trace } = viewWindow(prepared, protocol, aside, found);
    expect(trace).toBeNull();
    expect(window).toMatchObject({ included: false, reason: "A cough.", K: null });
  });
});
