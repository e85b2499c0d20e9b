import { EngineError } from "#app/engine/errors.ts";
import { fivePointFirst, fivePointSecond } from "#app/engine/math/difference.ts";
import { savitzkyGolaySmooth } from "#app/engine/math/savitzky-golay.ts";
import { lowPass, SHORTEST_SEGMENT_SAMPLES } from "#app/engine/prepare/low-pass.ts";
import { shiftEarlier } from "#app/engine/prepare/shift.ts";
import type {
  AxisSignals,
  DerivativeProtocol,
  PreparedAxis,
  Protocol,
  Segment,
  Signals,
} from "#app/engine/types.ts";

/**
 * One axis from calibrated signals to what is fitted: the torque's delay taken out, angle and torque
 * through the same filter, the angle's derivatives; and the rig's angle filtered less, for finding
 * onsets (a 20 Hz filter would find a 50 ms ramp 5 ms early).
 *
 * Segments are the stretches where time is regular and every channel of the axis has a value, 20
 * samples or longer; each is filtered whole. Where the torque's delay shortens one, what is fitted
 * ends with it on both sides of the model; onsets are those of the angle, which has no delay.
 *
 * @param only  "fit" leaves the columns for finding onsets empty and the slip out: at each further
 *   cut-off that is tried, the onsets are known
 * @throws EngineError "protocol" where the cut-off or the smoothing span does not suit the rate
 */
export function prepareAxis(
  signals: Signals,
  axis: AxisSignals,
  protocol: Protocol,
  only: "all" | "fit" = "all",
): PreparedAxis {
  const { rateHz } = signals;
  const limb = axis.limbAngle?.si ?? null;
  const recorded = [axis.angle.si, axis.torqueNm, ...(limb ? [limb] : [])];
  const whole = breakAtMissing(signals.segments, recorded);
  const torqueNm =
    protocol.lag_ms === 0
      ? axis.torqueNm
      : shiftEarlier(axis.torqueNm, whole, rateHz, protocol.lag_ms);
  const isLongEnough = ({ start, end }: Segment) => end - start >= SHORTEST_SEGMENT_SAMPLES;
  const onsetSegments = whole.filter(isLongEnough);
  const segments = breakAtMissing(whole, [torqueNm]).filter(isLongEnough);

  const filter = filterFor(protocol, rateHz);
  const smoothing = smoothingFor(protocol.derivative, rateHz);
  const condition = (x: Float64Array) => {
    const filtered = lowPass(x, segments, rateHz, filter);
    if (smoothing === null) return filtered;
    return bySegment(filtered, segments, (part, out) =>
      out.set(savitzkyGolaySmooth(part, smoothing.spanSamples, smoothing.polynomial)),
    );
  };
  const fitsLimb = fitsLimbAngle(protocol, axis.name);
  const angleRad = condition(fitsLimb && limb ? limb : axis.angle.si);
  const onsetAngleRad =
    only === "fit"
      ? new Float64Array(0)
      : lowPass(axis.angle.si, onsetSegments, rateHz, {
          order: 2,
          cutoffHz: Math.min(protocol.onset.cutoff_hz, 0.2 * rateHz),
        });
  const stepS = 1 / rateHz;
  const first = (part: Float64Array, out: Float64Array) => fivePointFirst(part, stepS, out);
  const second = (part: Float64Array, out: Float64Array) => fivePointSecond(part, stepS, out);
  return {
    name: axis.name,
    angleRad,
    velocityRadPerS: bySegment(angleRad, segments, first),
    accelerationRadPerS2: bySegment(angleRad, segments, second),
    torqueNm: condition(torqueNm),
    onsetAngleRad,
    onsetVelocityRadPerS:
      only === "fit" ? onsetAngleRad : bySegment(onsetAngleRad, onsetSegments, first),
    slipRad:
      only === "fit"
        ? null
        : limb && condition(axis.angle.si.map((rig, i) => rig - (limb[i] as number))),
    onsetSegments,
    segments,
  };
}

/** The parts of the segments in which all columns have values. */
function breakAtMissing(segments: readonly Segment[], columns: readonly Float64Array[]): Segment[] {
  const parts: Segment[] = [];
  for (const { start, end } of segments) {
    let from = start;
    for (let i = start; i <= end; i++) {
      if (i < end && hasAll(columns, i)) continue;
      if (i > from) parts.push({ start: from, end: i });
      from = i + 1;
    }
  }
  return parts;
}

function hasAll(columns: readonly Float64Array[], i: number): boolean {
  for (const column of columns) if (Number.isNaN(column[i])) return false;
  return true;
}

/** A new array to which `change` writes each segment on its own; NaN outside. */
function bySegment(
  x: Float64Array,
  segments: readonly Segment[],
  change: (part: Float64Array, out: Float64Array) => void,
): Float64Array {
  const y = new Float64Array(x.length).fill(Number.NaN);
  for (const { start, end } of segments) change(x.subarray(start, end), y.subarray(start, end));
  return y;
}

function filterFor(protocol: Protocol, rateHz: number): { order: number; cutoffHz: number } | null {
  if (protocol.filter === null) return null;
  const { order, cutoff_hz: cutoffHz } = protocol.filter;
  if (cutoffHz >= rateHz / 2) {
    throw new EngineError(
      "protocol",
      `The cut-off of ${cutoffHz} Hz is not below half the sampling rate of ${Number(rateHz.toPrecision(6))} Hz: choose a lower one.`,
      { field: "filter.cutoff_hz" },
    );
  }
  return { order, cutoffHz };
}

/** The span in samples: the odd number nearest to the protocol's milliseconds. */
function smoothingFor(
  derivative: DerivativeProtocol,
  rateHz: number,
): { spanSamples: number; polynomial: number } | null {
  if (derivative === "central") return null;
  const { polynomial, span_ms: spanMs } = derivative.savitzky_golay;
  const spanSamples = 2 * Math.round(((spanMs * rateHz) / 1000 - 1) / 2) + 1;
  if (spanSamples <= polynomial) {
    throw new EngineError(
      "protocol",
      `The smoothing span of ${spanMs} ms holds ${Math.max(spanSamples, 0)} samples at ${Number(rateHz.toPrecision(6))} Hz, too few for a polynomial of degree ${polynomial}: choose a longer one.`,
      { field: "derivative.savitzky_golay.span_ms" },
    );
  }
  return { spanSamples, polynomial };
}

function fitsLimbAngle(protocol: Protocol, name: string): boolean {
  return protocol.axes.find((axis) => axis.name === name)?.fit_angle === "limb";
}
