import { describe, expect, it } from "vitest";
import { EngineError } from "#app/engine/errors.ts";
import { leastSquares } from "#app/engine/math/least-squares.ts";
import { type MovementState, minimumJerk } from "#app/engine/math/minimum-jerk.ts";
import { mean } from "#app/engine/math/moments.ts";
import { prepareAxis } from "#app/engine/prepare/prepare-axis.ts";
import type {
  AxisSignals,
  ChannelSignal,
  PreparedAxis,
  Segment,
  Signals,
  TransientProtocol,
} from "#app/engine/types.ts";
import { readFixture } from "../../../tests/support/read-fixture.ts";

const { exact_transient: transient } = readFixture<{
  exact_transient: { theta: number[]; torque: number[] };
}>("minimum-jerk", "closed-form.json");
const TRUE = { K: 60, B: 0.8, I: 0.012 };

describe("a joint of known K, B and I under a 3° ramp in 50 ms (closed form), 0 to 100 ms", () => {
  // What is left at 1 kHz comes from the ramp's corners, where the torque has a kink that samples
  // cannot hold: at 10 kHz it is a hundredth of that.
  it.each([
    ["no filter", null],
    ["100 Hz", 100],
    ["50 Hz", 50],
    ["20 Hz", 20],
  ])("is found to a thousandth with %s on both signals", (_, cutoffHz) => {
    const prepared = prepare({
      filter: cutoffHz === null ? null : { family: "butterworth", order: 2, cutoff_hz: cutoffHz },
    });
    expectImpedance(fitted(prepared, 100), TRUE, 0.001);
  });

  it("is found to a hundred-thousandth with 20 Hz on both signals at 10 kHz", () => {
    const rateHz = 10_000;
    const states = Array.from({ length: 3000 }, (_, i) =>
      minimumJerk(Math.PI / 60, 0.05, (i - 1000) / rateHz),
    );
    const signals = recording({
      rateHz,
      angle: Float64Array.from(states, ({ position }) => position),
      torque: Float64Array.from(states, torqueOf),
    });
    expectImpedance(
      fitted(prepareAxis(signals, axisOf(signals), protocol()), 1000, 10),
      TRUE,
      1e-5,
    );
  });

  // Linear and time-invariant: a smoothing that both signals share leaves K, B and I alone.
  it("is found to a thousandth with a Savitzky–Golay smoothing of both signals", () => {
    const prepared = prepare({
      derivative: { savitzky_golay: { polynomial: 3, span_ms: 21 } },
    });
    expectImpedance(fitted(prepared, 100), TRUE, 0.001);
  });

  // A delay of 5 ms costs I −47 % and K −4.6 % (computed elsewhere: 0.006337, 57.2512, three-point
  // derivatives), and nothing once it is taken out.
  it("is lost to a torque that is 5 ms late, and found again with lag_ms 5", () => {
    const late = shifted(transient.torque, 5);
    const left = fitted(prepare({ filter: null }, late), 100);
    expect(left.I / 0.006337).toBeCloseTo(1, 1);
    expect(left.K / 57.2512).toBeCloseTo(1, 2);
    expectImpedance(fitted(prepare({ filter: null, lag_ms: 5 }, late), 100), TRUE, 0.001);
  });

  it("is found again with a lag between samples, which only interpolation blurs", () => {
    const late = Float64Array.from({ length: 300 }, (_, i) =>
      torqueOf(minimumJerk(Math.PI / 60, 0.05, (i - 100 - 2.5) / 1000)),
    );
    expectImpedance(fitted(prepare({ lag_ms: 2.5 }, late), 100), TRUE, 0.005);
  });
});

describe("the angle for finding onsets", () => {
  // First and last sample over 5 % of the filtered peak velocity, 0.1 ms grid, one filter at a time:
  // computed outside of this program with scipy (a 50 ms ramp that starts at 0). ± 0.1 ms.
  it.each([
    [100, 2.9, 47.1],
    [50, 2, 48],
    [20, -5.3, 55.3],
  ])(
    "with %i Hz lets a 50 ms ramp begin at %f ms and end at %f ms",
    (cutoffHz, beginsMs, endsMs) => {
      const rateHz = 10_000;
      const angle = Float64Array.from(
        { length: 10_000 },
        (_, i) => minimumJerk(Math.PI / 60, 0.05, (i - 4000) / rateHz).position,
      );
      const signals = recording({ rateHz, angle });
      const onset = { ...protocol().onset, cutoff_hz: cutoffHz };
      const { onsetVelocityRadPerS: velocity } = prepareAxis(
        signals,
        axisOf(signals),
        protocol({ onset }),
      );
      const peak = velocity.reduce((largest, v) => Math.max(largest, v || 0), 0);
      const over = (v: number) => v > 0.05 * peak;
      expect(Math.abs((velocity.findIndex(over) - 4000) / 10 - beginsMs)).toBeLessThan(0.15);
      expect(Math.abs((velocity.findLastIndex(over) - 4000) / 10 - endsMs)).toBeLessThan(0.15);
    },
  );

  it("is filtered at 0.2 of the rate where the protocol's cut-off is higher, whatever the filter", () => {
    const wanted = (cutoffHz: number) => ({ ...protocol().onset, cutoff_hz: cutoffHz });
    const high = prepare({ onset: wanted(4000), filter: null });
    const limit = prepare({ onset: wanted(200), filter: null });
    const lower = prepare({ onset: wanted(60), filter: null });
    expect(high.onsetAngleRad).toEqual(limit.onsetAngleRad);
    expect(high.onsetAngleRad).not.toEqual(lower.onsetAngleRad);
  });
});

describe("segments of an axis", () => {
  it("are time's own, each with two samples at each end without derivatives", () => {
    const prepared = prepare({}, undefined, { segments: [segment(0, 120), segment(120, 300)] });
    expect(prepared.segments).toEqual([segment(0, 120), segment(120, 300)]);
    const none = [0, 1, 118, 119, 120, 121, 298, 299];
    for (const y of [
      prepared.velocityRadPerS,
      prepared.accelerationRadPerS2,
      prepared.onsetVelocityRadPerS,
    ]) {
      expect(missingOf(y)).toEqual(none);
    }
    expect(missingOf(prepared.angleRad)).toEqual([]);
    expect(missingOf(prepared.torqueNm)).toEqual([]);
  });

  it("break at a missing sample of the angle, the torque or the second angle of this axis", () => {
    for (const channel of ["angle", "torque", "limb"] as const) {
      const columns = {
        angle: Float64Array.from(transient.theta),
        torque: Float64Array.from(transient.torque),
        limb: Float64Array.from(transient.theta),
      };
      columns[channel][150] = Number.NaN;
      const signals = recording(columns);
      const prepared = prepareAxis(signals, axisOf(signals), protocol());
      expect(prepared.segments).toEqual([segment(0, 150), segment(151, 300)]);
      for (const y of [
        prepared.angleRad,
        prepared.torqueNm,
        prepared.onsetAngleRad,
        prepared.slipRad,
      ]) {
        expect(y && missingOf(y)).toEqual([150]);
      }
    }
  });

  it("under 20 samples are left out whole", () => {
    const prepared = prepare({}, undefined, {
      segments: [segment(0, 19), segment(19, 39), segment(39, 300)],
    });
    expect(prepared.segments).toEqual([segment(19, 39), segment(39, 300)]);
    expect(missingOf(prepared.torqueNm)).toEqual(Array.from({ length: 19 }, (_, i) => i));
  });

  it("lose what the shifted torque does not reach, at the end for a late one, else at the start", () => {
    const segments = [segment(0, 120), segment(120, 300)];
    expect(prepare({ lag_ms: 3.5 }, undefined, { segments }).segments).toEqual([
      segment(0, 116),
      segment(120, 296),
    ]);
    expect(prepare({ lag_ms: -3.5 }, undefined, { segments }).segments).toEqual([
      segment(4, 120),
      segment(124, 300),
    ]);
  });

  it("are whole for the onsets, which are the angle's and know no delay", () => {
    const segments = [segment(0, 120), segment(120, 300)];
    const plain = prepare({}, undefined, { segments });
    const late = prepare({ lag_ms: 80 }, undefined, { segments });
    expect(late.onsetSegments).toEqual(segments);
    expect(late.segments).toEqual([segment(0, 40), segment(120, 220)]);
    expect(late.onsetVelocityRadPerS).toEqual(plain.onsetVelocityRadPerS);
  });

  it("smoothed over 21 ms have no value in the 10 samples at each end, no derivative in 12", () => {
    const prepared = prepare({ derivative: { savitzky_golay: { polynomial: 3, span_ms: 21 } } });
    const ends = (n: number) => [
      ...Array.from({ length: n }, (_, i) => i),
      ...Array.from({ length: n }, (_, i) => 300 - n + i),
    ];
    expect(missingOf(prepared.angleRad)).toEqual(ends(10));
    expect(missingOf(prepared.torqueNm)).toEqual(ends(10));
    expect(missingOf(prepared.accelerationRadPerS2)).toEqual(ends(12));
    expect(missingOf(prepared.onsetVelocityRadPerS)).toEqual(ends(2));
  });

  it("are smoothed over the odd number of samples nearest to the span", () => {
    const ends = (spanMs: number) =>
      missingOf(
        prepare({ derivative: { savitzky_golay: { polynomial: 2, span_ms: spanMs } } }).angleRad,
      ).length / 2;
    expect([20, 20.9, 21.9, 22, 23].map(ends)).toEqual([10, 10, 10, 11, 11]);
  });
});

describe("a second angle", () => {
  const rig = Float64Array.from(transient.theta);
  const limb = rig.map((value) => 0.9 * value);

  it("is fitted where the protocol says so; onsets stay with the rig's", () => {
    const signals = recording({ angle: rig, limb });
    const base = protocol();
    const axes = base.axes.map((axis) => ({ ...axis, fit_angle: "limb" as const }));
    const byRig = prepareAxis(signals, axisOf(signals), base);
    const byLimb = prepareAxis(signals, axisOf(signals), { ...base, axes });
    expect((byLimb.angleRad[200] ?? 0) / (byRig.angleRad[200] ?? 0)).toBeCloseTo(0.9, 10);
    expect(byLimb.onsetAngleRad).toEqual(byRig.onsetAngleRad);
  });

  it("gives the slip, rig less limb, filtered like the angle", () => {
    const signals = recording({ angle: rig, limb });
    const prepared = prepareAxis(signals, axisOf(signals), protocol());
    prepared.slipRad?.forEach((slip, i) => {
      expect(slip).toBeCloseTo(0.1 * (prepared.angleRad[i] ?? Number.NaN), 12);
    });
    expect(prepare({}).slipRad).toBeNull();
  });
});

describe("a protocol that does not suit the recording's rate", () => {
  it("is refused by its field where the cut-off is not below half the rate", () => {
    const filter = (cutoff: number) =>
      ({ filter: { family: "butterworth", order: 2, cutoff_hz: cutoff } }) as const;
    const error = thrownBy(() => prepare(filter(500)));
    expect(error).toMatchObject({ name: "protocol", field: "filter.cutoff_hz" });
    expect(error.message).toMatch(/500 Hz.*1000 Hz/);
    expect(prepare(filter(499)).segments).toHaveLength(1);
  });

  it("is refused by its field where the smoothing span holds too few samples", () => {
    const error = thrownBy(() =>
      prepare({ derivative: { savitzky_golay: { polynomial: 3, span_ms: 3 } } }),
    );
    expect(error).toMatchObject({ name: "protocol", field: "derivative.savitzky_golay.span_ms" });
  });
});

function thrownBy(call: () => unknown): EngineError {
  try {
    call();
  } catch (error) {
    if (error instanceof EngineError) return error;
    throw error;
  }
  throw new Error("nothing was thrown");
}

function prepare(
  changes: Partial<TransientProtocol>,
  torque: Float64Array = Float64Array.from(transient.torque),
  time: { segments?: Segment[] } = {},
): PreparedAxis {
  const signals = recording({ torque, ...time });
  return prepareAxis(signals, axisOf(signals), protocol(changes));
}

function torqueOf({ position, velocity, acceleration }: MovementState): number {
  return TRUE.K * position + TRUE.B * velocity + TRUE.I * acceleration;
}

/** K, B and I over 0 to 100 ms after `onset`, means over the 50 ms before it subtracted. */
function fitted(
  prepared: PreparedAxis,
  onset: number,
  samplesPerMs = 1,
): { K: number; B: number; I: number } {
  const relative = (column: Float64Array) => {
    const rest = mean(column, onset - 50 * samplesPerMs, onset);
    return column.slice(onset, onset + 100 * samplesPerMs + 1).map((value) => value - rest);
  };
  const theta = relative(prepared.angleRad);
  const omega = relative(prepared.velocityRadPerS);
  const alpha = relative(prepared.accelerationRadPerS2);
  const torque = relative(prepared.torqueNm);
  const fit = leastSquares([theta, omega, alpha], torque);
  if (fit.status !== "solved") throw new Error(fit.status);
  const [K = Number.NaN, B = Number.NaN, I = Number.NaN] = fit.coefficients;
  return { K, B, I };
}

function expectImpedance(
  found: { K: number; B: number; I: number },
  wanted: { K: number; B: number; I: number },
  share: number,
): void {
  for (const term of ["K", "B", "I"] as const) {
    expect(Math.abs(found[term] / wanted[term] - 1), term).toBeLessThan(share);
  }
}

function missingOf(y: Float64Array): number[] {
  return [...y.keys()].filter((i) => Number.isNaN(y[i]));
}

function shifted(torque: number[], samples: number): Float64Array {
  return Float64Array.from(torque, (_, i) => torque[Math.max(0, i - samples)] ?? Number.NaN);
}

function segment(start: number, end: number): Segment {
  return { start, end };
}

function axisOf(signals: Signals): AxisSignals {
  const axis = signals.axes[0];
  if (axis === undefined) throw new Error("no axis");
  return axis;
}

function channel(column: string, si: Float64Array): ChannelSignal {
  return {
    column,
    si,
    rawMin: -1,
    rawMax: 1,
    clippedRun: new Uint8Array(si.length),
    filled: null,
    constant: false,
  };
}

function recording({
  rateHz = 1000,
  angle = Float64Array.from(transient.theta),
  torque = new Float64Array(angle.length),
  limb,
  segments = [{ start: 0, end: angle.length }],
}: {
  rateHz?: number;
  angle?: Float64Array;
  torque?: Float64Array;
  limb?: Float64Array;
  segments?: Segment[];
}): Signals {
  const samples = angle.length;
  return {
    samples,
    rateHz,
    durationS: (samples - 1) / rateHz,
    timeS: Float64Array.from({ length: samples }, (_, i) => i / rateHz),
    segments,
    gapBefore: [],
    duplicateBefore: [],
    gaps: 0,
    duplicates: 0,
    missing: 0,
    axes: [
      {
        name: "FE",
        angle: channel("ang_fe", angle),
        limbAngle: limb ? channel("limb_fe", limb) : null,
        torqueNm: torque,
        torqueChannels: [channel("trq_fe", torque)],
      },
    ],
    trigger: null,
    emg: [],
    flags: [],
    dialect: {
      encoding: "utf-8",
      separator: ",",
      decimal: ".",
      headerLine: 1,
      unitsLine: null,
    },
  };
}

function protocol(changes: Partial<TransientProtocol> = {}): TransientProtocol {
  return {
    version: 1,
    kind: "transient",
    table: { separator: "auto", decimal: "auto", header_row: "auto" },
    time: { column: "t", unit: "s" },
    axes: [
      {
        name: "FE",
        positive: "extension",
        negative: "flexion",
        angle: { column: "ang_fe", unit: "rad", gain: 1, offset: 0, sign: 1 },
        torque: { column: "trq_fe", unit: "N.m", gain: 1, offset: 0, sign: 1 },
      },
    ],
    emg: [],
    filter: { family: "butterworth", order: 2, cutoff_hz: 20 },
    derivative: "central",
    onset: {
      from: "angle",
      trigger_column: null,
      cutoff_hz: 50,
      min_separation_ms: 500,
      expected_amplitude_deg: null,
      expected_duration_ms: null,
    },
    reflex_limit_ms: 50,
    background: { target: null, tolerance: null },
    baseline_ms: [-50, 0],
    window_ms: [0, 100],
    model: { terms: ["K", "B", "I"], fixed: {}, nonnegative: false },
    rig: { K: 0, B: 0, I: 0 },
    lag_ms: 0,
    max_filled_samples: 0,
    uncertainty: { level: 0.95, resamples: 2000, seed: 1 },
    ...changes,
  };
}
