import { z } from "zod";
import type { Result, WindowChoice, WindowsDocument } from "#app/engine/types.ts";

/** A fit: one recording under one protocol version, and the rules of saving it. */

export const FIT_STATES = ["draft", "submitted", "returned", "approved"] as const;
export type FitState = (typeof FIT_STATES)[number];

export const VERIFICATIONS = ["unverified", "verified", "differs"] as const;
/** Whether the server has computed the same numbers from the stored file. */
export type Verification = (typeof VERIFICATIONS)[number];

// ---------------------------------------------------------------- windows as a person left them

const milliseconds = z.number().min(-10_000).max(10_000);

export const savedWindowSchema = z
  .strictObject({
    axis: z.string().min(1).max(40),
    onset_s: z.number(),
    window_ms: z.tuple([milliseconds, milliseconds]),
    included: z.boolean(),
    /** A code of the engine's or a person's sentence. */
    reason: z.string().trim().min(1).max(300).nullable(),
    origin: z.enum(["found", "by_hand"]),
    /** Whether a person changed it since the engine found it. */
    edited: z.boolean(),
  })
  .refine((window) => window.window_ms[0] < window.window_ms[1], {
    message: "A window ends after it begins.",
    path: ["window_ms"],
  })
  .refine((window) => window.included || window.reason !== null, {
    message: "A window that is set aside needs a reason.",
    path: ["reason"],
  });
export type SavedWindow = WindowChoice & { origin: "found" | "by_hand"; edited: boolean };

/**
 * WINDOWS of the headless command for one recording. The screen that fits and the server that
 * fits again both start from this document, never from the finding of onsets.
 */
export function windowsDocumentOf(
  recordingSha256: string,
  windows: readonly WindowChoice[],
): WindowsDocument {
  return {
    version: 1,
    windows: windows.map(({ axis, onset_s, window_ms, included, reason }) => ({
      recording_sha256: recordingSha256,
      axis,
      onset_s,
      window_ms,
      included,
      reason,
    })),
  };
}

/** The same window with the same trim and the same decision. */
export function isSameWindow(one: WindowChoice, other: WindowChoice): boolean {
  return (
    one.axis === other.axis &&
    one.onset_s === other.onset_s &&
    one.window_ms[0] === other.window_ms[0] &&
    one.window_ms[1] === other.window_ms[1] &&
    one.included === other.included &&
    one.reason === other.reason
  );
}

// ---------------------------------------------------------------- a result that comes from a browser

const numberOrNull = z.number().nullable();
const interval = z.tuple([z.number(), z.number()]);
const flags = z.array(z.object({ code: z.string(), text: z.string() }));

const pooledTerm = z.looseObject({
  estimate: numberOrNull,
  window_mean: numberOrNull,
  window_sd: numberOrNull,
  t: interval.nullable(),
  bootstrap: interval.nullable(),
});

const terms = { K: numberOrNull, B: numberOrNull, I: numberOrNull };

/**
 * The shape of RESULT. Keys that an engine adds are let through: the server's own computation
 * decides whether they are right.
 */
export const resultSchema: z.ZodType<Result> = z.looseObject({
  result_version: z.literal(1),
  engine: z.string().min(1).max(100),
  protocol_sha256: z.string(),
  recordings: z.array(
    z.looseObject({
      file: z.string(),
      sha256: z.string(),
      samples: z.int(),
      rate_hz: z.number(),
      duration_s: z.number(),
      gaps: z.int(),
      duplicates: z.int(),
      missing: z.int(),
      flags,
    }),
  ),
  rig: z.record(
    z.string(),
    z.looseObject({
      K: z.number(),
      B: z.number(),
      I: z.number(),
      K_sd: numberOrNull,
      B_sd: numberOrNull,
      I_sd: numberOrNull,
    }),
  ),
  windows: z.array(
    z.looseObject({
      recording: z.int(),
      axis: z.string(),
      direction: z.string().nullable(),
      onset_s: z.number(),
      window_ms: interval,
      amplitude_deg: numberOrNull,
      duration_ms: numberOrNull,
      background_torque: numberOrNull,
      included: z.boolean(),
      reason: z.string().nullable(),
      ...terms,
      vaf_pct: numberOrNull,
      vaf_uncentred_pct: numberOrNull,
      rms_residual: numberOrNull,
      condition_number: numberOrNull,
      lag1: numberOrNull,
      slip_pct: numberOrNull,
      emg: z.array(
        z.looseObject({
          muscle: z.string(),
          unit: z.enum(["V", "1"]),
          baseline: numberOrNull,
          burst: z.boolean(),
          latency_ms: numberOrNull,
        }),
      ),
      flags,
    }),
  ),
  pooled: z.array(
    z.looseObject({
      axis: z.string(),
      direction: z.string(),
      windows: z.int(),
      K: pooledTerm,
      B: pooledTerm,
      I: pooledTerm,
      vaf_pct: numberOrNull,
      vaf_uncentred_pct: numberOrNull,
      lag_estimate_ms: numberOrNull,
      order_lag1: numberOrNull,
      robustness: z
        .array(z.looseObject({ window_end_ms: z.number(), cutoff_hz: numberOrNull, ...terms }))
        .nullable(),
      late: z
        .looseObject({
          latency_ms: numberOrNull,
          peak: numberOrNull,
          peak_ms: numberOrNull,
          impulse: numberOrNull,
          apparent_stiffness: numberOrNull,
        })
        .nullable(),
      ensemble: z.looseObject({ ...terms, vaf_pct: numberOrNull }),
      correlation: z.array(z.array(z.number())).nullable(),
      share: z.looseObject(terms),
      flags,
    }),
  ),
});

// ---------------------------------------------------------------- two results, one file

/** How far two computations of one number may be apart, of the larger one. */
export const AGREEMENT = 1e-12;

export interface ResultDifference {
  /** Where in the document: "windows[3].K". */
  path: string;
  saved: unknown;
  computed: unknown;
  /** |saved − computed| over the larger of the two; null where they are not both numbers. */
  relative: number | null;
}

/**
 * The first place where two result documents are apart: a number by more than `AGREEMENT`, any
 * other value at all. Null where they agree.
 */
export function compareResults(
  saved: unknown,
  computed: unknown,
  path = "",
): ResultDifference | null {
  if (typeof saved === "number" && typeof computed === "number") {
    if (saved === computed) return null;
    const relative = Math.abs(saved - computed) / Math.max(Math.abs(saved), Math.abs(computed));
    return relative <= AGREEMENT ? null : { path, saved, computed, relative };
  }
  if (Array.isArray(saved) && Array.isArray(computed)) {
    if (saved.length !== computed.length) {
      const at = path === "" ? "length" : `${path}.length`;
      return { path: at, saved: saved.length, computed: computed.length, relative: null };
    }
    for (const [index, value] of saved.entries()) {
      const difference = compareResults(value, computed[index], `${path}[${index}]`);
      if (difference) return difference;
    }
    return null;
  }
  if (isRecord(saved) && isRecord(computed)) {
    for (const key of new Set([...Object.keys(saved), ...Object.keys(computed)])) {
      const inner = path === "" ? key : `${path}.${key}`;
      const difference = compareResults(saved[key], computed[key], inner);
      if (difference) return difference;
    }
    return null;
  }
  return saved === computed ? null : { path, saved, computed, relative: null };
}

/** The difference as a person reads it beside the fit. */
export function differenceSentence(difference: ResultDifference): string {
  const { path, saved, computed, relative } = difference;
  const apart = relative === null ? "" : `, ${relative.toExponential(1)} of it apart`;
  return `${path} was saved as ${shown(saved)}; the server computed ${shown(computed)}${apart}.`;
}

function shown(value: unknown): string {
  if (value === undefined) return "nothing";
  const text = JSON.stringify(value);
  return text.length > 60 ? `${text.slice(0, 57)}…` : text;
}

function isRecord(value: unknown): value is Record<string, unknown> {
  return typeof value === "object" && value !== null && !Array.isArray(value);
}
