import type { PlacedColumns } from "#app/engine/pool/stack.ts";
import type { ResultPooled } from "#app/engine/types.ts";

/** Late torque is over this many times the pooled fit's RMS residual, for at least 10 ms. */
const RMS_FACTOR = 3;
const LEAST_RUN_MS = 10;

/**
 * Torque after the window that the fitted, intrinsic model does not give: measured − model on the
 * mean trace, carried on from the window's end to 400 ms or the next onset. Beside EMG it tells a
 * reflex; without EMG the yielding of the muscle looks the same.
 *
 * @param trace  mean trace after the window, relative to the baseline, rig removed; null without one
 * @param modelledNm  the pooled model's torque on it
 * @returns times in ms after the onset, the peak with its sign (N·m), the impulse from the window's
 *   end on (N·m·s), the stiffness that the peak adds (N·m/rad)
 */
export function lateTorque(
  trace: PlacedColumns | null,
  modelledNm: Float64Array | null,
  rmsResidual: number | null,
  rateHz: number,
): NonNullable<ResultPooled["late"]> {
  const late = trace?.columns.torqueNm.map((torque, i) => torque - (modelledNm?.[i] ?? Number.NaN));
  if (!trace || !modelledNm || rmsResidual === null || !late || late.length === 0) {
    return { latency_ms: null, peak: null, peak_ms: null, impulse: null, apparent_stiffness: null };
  }
  const msAt = (i: number) => ((trace.first + i) * 1000) / rateHz;
  let peak = 0;
  let impulse = 0;
  for (let i = 0; i < late.length; i++) {
    if (Math.abs(late[i] as number) > Math.abs(late[peak] as number)) peak = i;
    if (i > 0) impulse += ((late[i - 1] as number) + (late[i] as number)) / (2 * rateHz);
  }
  const first = firstRun(
    late,
    RMS_FACTOR * rmsResidual,
    Math.ceil((LEAST_RUN_MS * rateHz) / 1000 - 1e-6),
  );
  const peakAngle = trace.columns.angleRad[peak] as number;
  return {
    latency_ms: first === null ? null : msAt(first),
    peak: late[peak] as number,
    peak_ms: msAt(peak),
    impulse,
    apparent_stiffness: peakAngle === 0 ? null : (late[peak] as number) / peakAngle,
  };
}

function firstRun(late: Float64Array, limit: number, least: number): number | null {
  let run = 0;
  for (let i = 0; i < late.length; i++) {
    run = Math.abs(late[i] as number) > limit ? run + 1 : 0;
    if (run >= least) return i - least + 1;
  }
  return null;
}
