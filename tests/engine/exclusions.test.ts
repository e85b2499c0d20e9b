import { describe, expect, it } from "vitest";
import type { Signals, WindowsDocument } from "#app/engine/types.ts";
import type { MadeRecording, Ramp } from "../support/made-signals.ts";
import { joint, makeProtocol, makeSignals, rampsAt } from "../support/made-signals.ts";
import { analyzeOne, codesOf, onlyWindow } from "../support/transient-case.ts";

const TRUE = { K: 40, B: 0.45, I: 0.01 };
const RATE = 1000;
/** What a window that is not fitted does not have. */
const QUALITY = [
  "K",
  "B",
  "I",
  "vaf_pct",
  "vaf_uncentred_pct",
  "rms_residual",
  "condition_number",
  "lag1",
  "slip_pct",
] as const;

function recording(ramps: Ramp[], more: Partial<MadeRecording> = {}): Signals {
  const move = (t: number) => rampsAt(ramps, t);
  return makeSignals({
    rateHz: RATE,
    durationS: 3,
    axes: [{ move, torque: joint(move, TRUE) }],
    ...more,
  });
}

const oneRamp: Ramp[] = [{ atS: 1, amplitudeDeg: 3, durationMs: 100 }];
const expected = { expected_amplitude_deg: 3, expected_duration_ms: 100 };

function windowAt(
  onsetS: number,
  changes: Partial<WindowsDocument["windows"][number]> = {},
): WindowsDocument["windows"][number] {
  return {
    recording_sha256: "recording",
    axis: "A0",
    onset_s: onsetS,
    window_ms: [0, 100],
    included: true,
    reason: null,
    ...changes,
  };
}

describe("a window is set aside, its values null", () => {
  function expectReason(signals: Signals, reason: string, protocol = makeProtocol()) {
    const window = onlyWindow(analyzeOne(signals, protocol));
    expect([window.included, window.reason]).toEqual([false, reason]);
    for (const key of QUALITY) expect(window[key], key).toBeNull();
    return window;
  }

  it("start_of_recording: the baseline begins before the first sample with a derivative", () => {
    const window = expectReason(
      recording([{ atS: 0.03, amplitudeDeg: 3, durationMs: 100 }]),
      "start_of_recording",
    );
    expect(window.direction).toBe("up");
    expect(window.amplitude_deg).toBeNull();
  });

  it("end_of_recording: the window runs over the last sample with a derivative", () => {
    const window = expectReason(
      recording([{ atS: 2.93, amplitudeDeg: 3, durationMs: 60 }]),
      "end_of_recording",
    );
    expect(window.background_torque).toBeCloseTo(0, 1);
  });

  it("end_of_recording: the movement lies where the late torque has nothing left to give", () => {
    expectReason(
      recording([{ atS: 2.92, amplitudeDeg: 3, durationMs: 60 }]),
      "end_of_recording",
      makeProtocol({ lag_ms: 100 }),
    );
  });

  it("missing_samples: a cell in the span has no value", () => {
    expectReason(recording(oneRamp, { missing: [965] }), "missing_samples");
  });

  it("missing_samples also where the missing cell splits the movement", () => {
    const result = analyzeOne(recording(oneRamp, { missing: [1050] }), makeProtocol());
    expect(result.windows.map(({ reason }) => reason)).toEqual(["missing_samples"]);
  });

  it("duplicate: a stamp in the span repeats the one before", () => {
    expectReason(recording(oneRamp, { duplicateBefore: [970] }), "duplicate");
  });

  it("gap: a gap in the span", () => {
    expectReason(recording(oneRamp, { gapBefore: [{ sample: 970, seconds: 0.01 }] }), "gap");
  });

  it("gap: the derivative needs samples beside a gap", () => {
    const probe = onlyWindow(analyzeOne(recording(oneRamp), makeProtocol()));
    const first = Math.round(probe.onset_s * RATE) - 50;
    // The two samples at a stretch's end have no derivative.
    for (const [sample, reason] of [
      [first - 1, "gap"],
      [first - 2, null],
    ] as const) {
      const signals = recording(oneRamp, { gapBefore: [{ sample, seconds: 0.0015 }] });
      const protocol = makeProtocol({ filter: null });
      const windows: WindowsDocument = {
        version: 1,
        windows: [windowAt(probe.onset_s + 0.0015)],
      };
      const window = onlyWindow(analyzeOne(signals, protocol, { windows }));
      expect([sample - first, window.reason]).toEqual([sample - first, reason]);
    }
  });

  it("gap: a movement that is under way when a stretch begins", () => {
    const signals = recording([{ atS: 0.99, amplitudeDeg: 3, durationMs: 100 }], {
      gapBefore: [{ sample: 1000, seconds: 0.03 }],
    });
    const window = expectReason(signals, "gap");
    expect(window.direction).toBe("up");
    expect(window.onset_s).toBeCloseTo(1.032, 3);
  });

  it("other_movement: over twice or under half as long as expected", () => {
    const slow = expectReason(
      recording([{ atS: 1, amplitudeDeg: 9, durationMs: 260 }]),
      "other_movement",
      makeProtocol({ onset: expected }),
    );
    expect(slow.duration_ms).toBeGreaterThan(200);
    const quick = expectReason(
      recording([{ atS: 1, amplitudeDeg: 3, durationMs: 40 }]),
      "other_movement",
      makeProtocol({ onset: expected }),
    );
    expect(quick.duration_ms).toBeLessThan(50);
    expect(quick.amplitude_deg).toBeCloseTo(3, 1);
  });

  it("overlap: the window reaches the next onset", () => {
    const ramps = [...oneRamp, { atS: 1.6, amplitudeDeg: 3, durationMs: 100 }];
    const result = analyzeOne(recording(ramps), makeProtocol({ window_ms: [0, 700] }));
    expect(result.windows.map(({ reason }) => reason)).toEqual(["overlap", null]);
  });

  it("too_short: a trimmed window has fewer than 2 samples a term", () => {
    const windows: WindowsDocument = {
      version: 1,
      windows: [windowAt(1, { window_ms: [0, 4] })],
    };
    const window = onlyWindow(analyzeOne(recording(oneRamp), makeProtocol(), { windows }));
    expect(window.reason).toBe("too_short");
    const six: WindowsDocument = { version: 1, windows: [windowAt(1, { window_ms: [20, 25] })] };
    expect(
      onlyWindow(analyzeOne(recording(oneRamp), makeProtocol(), { windows: six })).included,
    ).toBe(true);
  });

  it("singular: nothing moves in the window", () => {
    const windows: WindowsDocument = { version: 1, windows: [windowAt(2)] };
    const still = recording([]);
    const window = onlyWindow(analyzeOne(still, makeProtocol(), { windows }));
    expect([window.reason, window.direction]).toEqual(["singular", null]);
  });

  it("the first reason in the order start, end, missing, duplicate, gap, other, overlap hides the rest", () => {
    const ramps: Ramp[] = [{ atS: 1, amplitudeDeg: 9, durationMs: 260 }];
    const protocol = makeProtocol({ onset: expected });
    const broken = { missing: [960], duplicateBefore: [965] };
    expectReason(
      recording(ramps, { gapBefore: [{ sample: 970, seconds: 0.1 }], ...broken }),
      "missing_samples",
      protocol,
    );
    expectReason(
      recording(ramps, { gapBefore: [{ sample: 970, seconds: 0.1 }], duplicateBefore: [965] }),
      "duplicate",
      protocol,
    );
    expectReason(recording(ramps, { gapBefore: [{ sample: 970, seconds: 0.1 }] }), "gap", protocol);
    expectReason(recording(ramps), "other_movement", protocol);
  });
});

describe("which movements are perturbations", () => {
  it("a return movement is one of its own, in the other direction", () => {
    const ramps = [...oneRamp, { atS: 1.8, amplitudeDeg: -3, durationMs: 100 }];
    const result = analyzeOne(recording(ramps), makeProtocol({ onset: expected }));
    expect(result.windows.map(({ direction }) => direction)).toEqual(["up", "down"]);
    expect(result.pooled.map(({ direction, windows }) => [direction, windows])).toEqual([
      ["down", 1],
      ["up", 1],
    ]);
  });

  it("one that begins within the least separation of the last is none, and spoils nothing", () => {
    const ramps = [...oneRamp, { atS: 1.3, amplitudeDeg: -4, durationMs: 80 }];
    const window = onlyWindow(analyzeOne(recording(ramps), makeProtocol()));
    expect(window.included).toBe(true);
    expect(window.duration_ms).toBeLessThan(110);
  });

  it("the least separation runs across gaps", () => {
    const ramps = [...oneRamp, { atS: 1.45, amplitudeDeg: -3, durationMs: 100 }];
    const gapBefore = [{ sample: 1200, seconds: 0.05 }];
    expect(analyzeOne(recording(ramps, { gapBefore }), makeProtocol()).windows).toHaveLength(1);
    // The gap's own time counts: 50 ms more of it and the second one begins late enough.
    const later = [...oneRamp, { atS: 1.52, amplitudeDeg: -3, durationMs: 100 }];
    expect(analyzeOne(recording(later, { gapBefore }), makeProtocol()).windows).toHaveLength(2);
  });

  it("a slow drift is none, and the recording says so", () => {
    const result = analyzeOne(
      recording([{ atS: 0.5, amplitudeDeg: 2, durationMs: 2000 }]),
      makeProtocol(),
    );
    expect(result.windows).toEqual([]);
    expect(result.pooled).toEqual([]);
    expect(codesOf(result.recordings[0] ?? { flags: [] })).toEqual(["no_perturbation"]);
  });

  it("with a trigger each rise above the middle of its range is an onset", () => {
    const trigger = (t: number) => (Math.abs(t - 1.02) < 0.02 || Math.abs(t - 2.02) < 0.02 ? 5 : 0);
    const ramps = [...oneRamp, { atS: 2, amplitudeDeg: -3, durationMs: 100 }];
    const result = analyzeOne(
      recording(ramps, { trigger }),
      makeProtocol({ onset: { from: "trigger", trigger_column: "trg" } }),
    );
    expect(result.windows.map(({ onset_s }) => onset_s)).toEqual([1.001, 2.001]);
  });
});

describe("a windows document", () => {
  const ramps = [
    ...oneRamp,
    { atS: 1.7, amplitudeDeg: -3, durationMs: 100 },
    { atS: 2.4, amplitudeDeg: 3, durationMs: 100 },
  ];
  const signals = recording(ramps);
  const protocol = makeProtocol({ onset: expected });
  const found = analyzeOne(signals, protocol);

  it("with the windows that were found gives the same bytes", () => {
    const windows: WindowsDocument = {
      version: 1,
      windows: found.windows.map(({ axis, onset_s, window_ms, included, reason }) => ({
        recording_sha256: "recording",
        axis,
        onset_s,
        window_ms,
        included,
        reason,
      })),
    };
    expect(JSON.stringify(analyzeOne(signals, protocol, { windows }))).toBe(JSON.stringify(found));
  });

  it("takes an onset to the nearest sample, trims, and keeps a person's reason", () => {
    const windows: WindowsDocument = {
      version: 1,
      windows: [
        windowAt(2.40049, { window_ms: [0, 40] }),
        windowAt(1, { included: false, reason: "She was talking." }),
      ],
    };
    const result = analyzeOne(signals, protocol, { windows });
    expect(result.windows.map(({ onset_s }) => onset_s)).toEqual([1, 2.4]);
    expect(result.windows[0]).toMatchObject({
      included: false,
      reason: "She was talking.",
      K: null,
    });
    expect(result.windows[0]?.amplitude_deg).toBeCloseTo(3, 1);
    expect(result.windows[1]).toMatchObject({ included: true, window_ms: [0, 40], reason: null });
    expect(result.pooled[0]).toMatchObject({ direction: "up", windows: 1 });
  });

  it("keeps another movement and an overlap that a person includes, nothing else", () => {
    const slow = recording([
      { atS: 1, amplitudeDeg: 9, durationMs: 260 },
      { atS: 1.8, amplitudeDeg: -3, durationMs: 100 },
    ]);
    const windows: WindowsDocument = {
      version: 1,
      windows: [windowAt(1, { window_ms: [0, 900] }), windowAt(1.8), windowAt(2.95)],
    };
    const result = analyzeOne(slow, protocol, { windows });
    expect(result.windows.map(({ reason }) => reason)).toEqual([null, null, "end_of_recording"]);
  });

  it("that names an axis the protocol does not have is refused by its field", () => {
    const windows: WindowsDocument = { version: 1, windows: [windowAt(1, { axis: "Z" })] };
    expect(() => analyzeOne(signals, protocol, { windows })).toThrow('no axis "Z"');
  });
});

describe("a protocol that does not suit the rate is refused by its field", () => {
  it("window_ms with fewer than 2 samples a free term", () => {
    const protocol = makeProtocol({ window_ms: [0, 4] });
    expect(() => analyzeOne(recording(oneRamp), protocol)).toThrow(
      expect.objectContaining({ name: "protocol", field: "window_ms" }),
    );
  });

  it("baseline_ms without a sample", () => {
    const protocol = makeProtocol({ baseline_ms: [-0.4, 0.2] });
    expect(() => analyzeOne(recording(oneRamp), protocol)).toThrow(
      expect.objectContaining({ name: "protocol", field: "baseline_ms" }),
    );
  });
});
