import { checkDimensions } from "#app/engine/channels/dimensions.ts";
import { columnsOf, toSignals } from "#app/engine/channels/signals.ts";
import { EngineError, flag } from "#app/engine/errors.ts";
import { impedanceModel, SAMPLES_PER_TERM } from "#app/engine/fit/fit-model.ts";
import { checkFirstPart, readTable } from "#app/engine/parse/read-table.ts";
import type { Analysed } from "#app/engine/pipeline-pool.ts";
import { poolAll, poolingOf } from "#app/engine/pipeline-pool.ts";
import type { AxisRig } from "#app/engine/pipeline-rig.ts";
import { fitRig, rigProtocol } from "#app/engine/pipeline-rig.ts";
import type { Bench, Place, RecordingInput } from "#app/engine/pipeline-window.ts";
import {
  benchOf,
  chosenPlaces,
  emgBaselines,
  examine,
  foundPlaces,
  keptAmong,
  markRaised,
  placesOf,
  resultWindow,
  rigOf,
  traceOf,
} from "#app/engine/pipeline-window.ts";
import { prepareAxis } from "#app/engine/prepare/prepare-axis.ts";
import type {
  Impedance,
  Prepared,
  PreparedAxis,
  Protocol,
  Result,
  Signals,
  WindowChoice,
  WindowsDocument,
  WindowView,
} from "#app/engine/types.ts";
import { windowSpan } from "#app/engine/windows/window-span.ts";

// What taking a file in asks before there is a protocol: what the file looks like, which column is
// what, and the first movement in words.
export type { FirstMovement } from "#app/engine/channels/first-movement.ts";
export { firstMovement } from "#app/engine/channels/first-movement.ts";
export { proposeChannels } from "#app/engine/channels/propose.ts";
export { previewTable } from "#app/engine/parse/preview.ts";
export { FIRST_PART_BYTES } from "#app/engine/parse/read-table.ts";
export type { RecordingInput } from "#app/engine/pipeline-window.ts";

/** Name and version that every result carries; the version changes whenever a number may. */
export const ENGINE = "ogee-engine 1.0.0";

/**
 * Refuses a file by its first part (`FIRST_PART_BYTES`) where that is none of a recording for this
 * protocol; what it lets pass, {@link readRecording} may still refuse.
 *
 * @throws EngineError
 */
export function checkStart(part: Uint8Array, protocol: Protocol): void {
  checkDimensions(protocol);
  checkFirstPart(part, protocol.table, columnsOf(protocol));
}

/** Bytes → Signals. @throws EngineError; what is wrong with the protocol before what is wrong with the file */
export function readRecording(bytes: Uint8Array, protocol: Protocol): Signals {
  checkDimensions(protocol);
  return toSignals(readTable(bytes, protocol.table, columnsOf(protocol)), protocol);
}

/**
 * Signals → filtered, differentiated columns.
 *
 * @throws EngineError "protocol" where a cut-off, a window or a baseline does not suit the rate
 */
export function prepare(signals: Signals, protocol: Protocol): Prepared {
  checkSpans(protocol, signals.rateHz);
  return { signals, axes: signals.axes.map((axis) => prepareAxis(signals, axis, protocol)) };
}

/** Every perturbation that is found, also those that are excluded, by axis in protocol order, then onset. */
export function findWindows(prepared: Prepared, protocol: Protocol): WindowChoice[] {
  return protocol.axes.flatMap((_, index) => {
    const bench = benchOnAxis(prepared, protocol, index);
    return foundPlaces(bench).map((place) => {
      const { fit, reason } = examine(bench, place);
      return {
        axis: bench.axis.name,
        onset_s: bench.signals.timeS[place.onset] as number,
        window_ms: [...place.windowMs],
        included: fit !== null,
        reason,
      };
    });
  });
}

/**
 * One window's fit with its traces: the call that follows a drag. Its numbers are those of
 * {@link analyze} for a recording on its own.
 *
 * @param choices  all windows of the recording: those of the axis tell where the next movement
 *   begins, and the EMG before all that are included what raised EMG is
 */
export function viewWindow(
  prepared: Prepared,
  protocol: Protocol,
  choice: WindowChoice,
  choices: WindowChoice[],
): WindowView {
  const isOther = ({ axis, onset_s }: WindowChoice) =>
    axis !== choice.axis || onset_s !== choice.onset_s;
  const others = choices.filter(isOther);
  const { bench, places } = placesOnAxis(prepared, protocol, choice.axis, [choice, ...others]);
  const examined = examine(bench, places[0] as Place);
  const window = resultWindow(bench, examined, 0);
  if (window.emg.length > 0) {
    const kept = protocol.axes.flatMap(({ name }) => {
      const axis = placesOnAxis(prepared, protocol, name, others);
      return keptAmong(axis.bench, axis.places).map((place) => emgBaselines(axis.bench, place));
    });
    if (window.included) kept.push(emgBaselines(bench, examined.place));
    markRaised([window], kept);
  }
  return { window, trace: traceOf(bench, examined) };
}

function benchOnAxis({ signals, axes }: Prepared, protocol: Protocol, index: number): Bench {
  return benchOf(signals, axes[index] as PreparedAxis, protocol, index, rigOf(protocol, index));
}

function placesOnAxis(
  prepared: Prepared,
  protocol: Protocol,
  name: string,
  choices: readonly WindowChoice[],
): { bench: Bench; places: Place[] } {
  const index = protocol.axes.findIndex((axis) => axis.name === name);
  if (index < 0) throw new RangeError(`The protocol has no axis ${name}.`);
  const bench = benchOnAxis(prepared, protocol, index);
  const places = chosenPlaces(
    bench,
    choices.filter(({ axis }) => axis === name),
  );
  return { bench, places };
}

/**
 * The whole analysis: the one call of the browser's worker, the headless command and the server's
 * second look. Windows that `windows` names for a recording replace the finding of onsets there.
 *
 * @throws EngineError "protocol" where the protocol or `windows` does not suit a recording
 */
export function analyze(input: {
  protocol: Protocol;
  protocolSha256: string;
  recordings: RecordingInput[];
  rig: RecordingInput[];
  windows: WindowsDocument | null;
}): Result {
  const { protocol, recordings, windows } = input;
  checkAxes(protocol, windows, [...recordings, ...input.rig]);
  const rigs = rigsOf(protocol, input.rig, windows);
  const analysed = recordings.flatMap((recording, index) =>
    analyseRecording(protocol, recording, index, rigs, windows),
  );
  markRaised(
    analysed.map(({ window }) => window),
    analysed
      .filter(({ window }) => window.included)
      .map(({ window }) => window.emg.map(({ baseline }) => baseline)),
  );
  return {
    result_version: 1,
    engine: ENGINE,
    protocol_sha256: input.protocolSha256,
    recordings: recordings.map(({ file, sha256, signals }, index) => ({
      file,
      sha256,
      samples: signals.samples,
      rate_hz: signals.rateHz,
      duration_s: signals.durationS,
      gaps: signals.gaps,
      duplicates: signals.duplicates,
      missing: signals.missing,
      flags: analysed.some(({ window }) => window.recording === index)
        ? signals.flags
        : [...signals.flags, flag("no_perturbation")],
    })),
    rig: Object.fromEntries(
      protocol.axes.map(({ name }, index) => [name, (rigs[index] as AxisRig).rig]),
    ),
    windows: analysed.map(({ window }) => window),
    pooled: poolAll(protocol, recordings, rigs, analysed),
  };
}

/** All windows of one recording, by axis in protocol order, then onset. */
function analyseRecording(
  protocol: Protocol,
  { sha256, signals }: RecordingInput,
  recording: number,
  rigs: readonly { rig: Impedance }[],
  windows: WindowsDocument | null,
): Analysed[] {
  checkSpans(protocol, signals.rateHz);
  // One axis after the other: the columns of all at once would not fit beside a large recording.
  return signals.axes.flatMap((axis, index) => {
    const prepared = prepareAxis(signals, axis, protocol);
    const { rig } = rigs[index] as { rig: Impedance };
    const bench = benchOf(signals, prepared, protocol, index, rig);
    return placesOf(bench, sha256, windows).map((place) => {
      const examined = examine(bench, place);
      return {
        window: resultWindow(bench, examined, recording),
        place,
        rateHz: signals.rateHz,
        pooling: poolingOf(bench, examined),
      };
    });
  });
}

/** The rig of each axis: from its empty recordings, else as the protocol says. */
function rigsOf(
  protocol: Protocol,
  empty: readonly RecordingInput[],
  windows: WindowsDocument | null,
): AxisRig[] {
  const own = rigProtocol(protocol);
  const nothing = own.axes.map(() => ({ rig: { K: 0, B: 0, I: 0 } }));
  const analysed = empty.flatMap((recording, index) =>
    analyseRecording(own, recording, index, nothing, windows),
  );
  return protocol.axes.map(({ name }, index) => {
    const measured = fitRig(analysed.filter(({ window }) => window.axis === name));
    if (measured !== null) return { rig: measured, measured: true };
    const { K, B, I } = rigOf(protocol, index);
    return { rig: { K, B, I, K_sd: null, B_sd: null, I_sd: null }, measured: false };
  });
}

function checkSpans(protocol: Protocol, rateHz: number): void {
  const span = windowSpan(0, protocol.window_ms, protocol.baseline_ms, rateHz);
  const rate = `${Number(rateHz.toPrecision(6))} Hz`;
  const free = impedanceModel(protocol.model).free.length;
  const samples = span.end - span.start + 1;
  if (samples < SAMPLES_PER_TERM * free) {
    throw new EngineError(
      "protocol",
      `The window holds ${samples} samples at ${rate}, too few for ${free} free terms: lengthen it to at least ${SAMPLES_PER_TERM * free} samples.`,
      { field: "window_ms" },
    );
  }
  if (span.baselineEnd <= span.baselineStart) {
    throw new EngineError("protocol", `The baseline holds no sample at ${rate}: lengthen it.`, {
      field: "baseline_ms",
    });
  }
}

function checkAxes(
  protocol: Protocol,
  windows: WindowsDocument | null,
  recordings: readonly RecordingInput[],
): void {
  for (const [index, { axis, recording_sha256 }] of (windows?.windows ?? []).entries()) {
    if (protocol.axes.some(({ name }) => name === axis)) continue;
    if (!recordings.some(({ sha256 }) => sha256 === recording_sha256)) continue;
    throw new EngineError("protocol", `The protocol has no axis "${axis}", which a window names.`, {
      field: `windows[${index}].axis`,
    });
  }
}
