import { createHash } from "node:crypto";
import { readFileSync } from "node:fs";
import { join } from "node:path";
import { describe, expect, it } from "vitest";
import { parseProtocol } from "#app/domain/protocol.ts";
import { parseWindows } from "#app/domain/window.ts";
import { analyze, type RecordingInput, readRecording } from "#app/engine/pipeline.ts";
import type { Protocol, Result } from "#app/engine/types.ts";

/*
 * The whole way from bytes to RESULT against a second engine in Python (numpy, scipy), written from
 * the contract's text alone: fixtures/transient-crosscheck/generate.py. Every key that it gives is
 * compared; the two differ by rounding only.
 */

const FOLDER = join(import.meta.dirname, "../../fixtures/transient-crosscheck");
/** Of the larger of the two; some hundred thousand roundings, amplified by the second derivative. */
const RELATIVE = 1e-9;
/** For values that are near 0 by nature (correlations, lags, offsets). */
const ABSOLUTE = 1e-10;
/** Ends of the bootstrap interval, of its width: another generator draws other windows. */
const BOOTSTRAP = 0.1;

interface Expected {
  recordings: string[];
  rig: string[];
  windows: string | null;
  result: Record<string, unknown>;
}

const text = (file: string) => readFileSync(join(FOLDER, file), "utf8");
const sha256 = (bytes: Uint8Array | string) => createHash("sha256").update(bytes).digest("hex");

function input(file: string, protocol: Protocol): RecordingInput {
  const bytes = readFileSync(join(FOLDER, file));
  return { file, sha256: sha256(bytes), signals: readRecording(bytes, protocol) };
}

function analyzed(name: string, expected: Expected): Result {
  const protocolText = text(`${name}.protocol.json`);
  const protocol = parseProtocol(protocolText);
  return analyze({
    protocol,
    protocolSha256: sha256(protocolText),
    recordings: expected.recordings.map((file) => input(file, protocol)),
    rig: expected.rig.map((file) => input(file, protocol)),
    windows: expected.windows === null ? null : parseWindows(text(expected.windows)),
  });
}

/** Places where `actual` is not what is expected; keys that are not expected are free. */
function differences(expected: unknown, actual: unknown, path = ""): string[] {
  const apart = `${path}: ${JSON.stringify(expected)} expected, ${JSON.stringify(actual)} found`;
  if (path.endsWith(".flags")) {
    const codes = (actual as { code: string }[]).map((flag) => flag.code).sort();
    return JSON.stringify(codes) === JSON.stringify(expected)
      ? []
      : [`${path}: ${JSON.stringify(expected)} expected, ${JSON.stringify(codes)} found`];
  }
  if (typeof expected === "number" && typeof actual === "number") {
    const allowed = ABSOLUTE + RELATIVE * Math.max(Math.abs(expected), Math.abs(actual));
    return Math.abs(expected - actual) <= allowed ? [] : [apart];
  }
  if (path.endsWith(".bootstrap") && Array.isArray(expected) && Array.isArray(actual)) {
    const [low, high] = expected as [number, number];
    const allowed = BOOTSTRAP * (high - low) + ABSOLUTE;
    return Math.abs(low - actual[0]) <= allowed && Math.abs(high - actual[1]) <= allowed
      ? []
      : [apart];
  }
  if (Array.isArray(expected) && Array.isArray(actual)) {
    if (expected.length !== actual.length) return [apart];
    return expected.flatMap((value, index) =>
      differences(value, actual[index], `${path}.${index}`),
    );
  }
  if (typeof expected === "object" && expected !== null) {
    if (typeof actual !== "object" || actual === null) return [apart];
    return Object.entries(expected).flatMap(([key, value]) =>
      differences(value, (actual as Record<string, unknown>)[key], `${path}.${key}`),
    );
  }
  return expected === actual ? [] : [apart];
}

/** How many numbers a case compares, so that an empty one cannot pass. */
function countNumbers(value: unknown): number {
  if (typeof value === "number") return 1;
  if (typeof value !== "object" || value === null) return 0;
  return Object.values(value).reduce((sum: number, entry) => sum + countNumbers(entry), 0);
}

describe("the engine and a second one, written in Python from the contract alone, agree to 1e-9 on", () => {
  it.each([
    ["two wrists pooled: gap, holes, rig, EMG, robustness", "wrist-usual", 700],
    ["a window before the reflex: late torque, smoothing, lag, a rig by names", "wrist-early", 380],
    ["no filter, a fixed and a bounded term", "wrist-bounded", 150],
    ["a model of two terms, a rig for all axes", "wrist-two-terms", 150],
    ["windows by hand", "wrist-by-hand", 450],
    ["what lies at an edge, is cut, stands twice or saturates", "edges", 180],
    ["a force plate, a trigger and the limb's own angle", "ankle-trigger", 150],
    ["a force plate, onsets from the angle, slip", "ankle-angle", 150],
  ])("%s", (_what, name, least) => {
    const expected = JSON.parse(text(`${name}.expected.json`)) as Expected;
    expect(countNumbers(expected.result)).toBeGreaterThan(least);
    expect(differences(expected.result, analyzed(name, expected))).toEqual([]);
  });
});
