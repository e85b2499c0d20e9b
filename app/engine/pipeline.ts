import type {
  Prepared,
  Protocol,
  Result,
  Signals,
  WindowChoice,
  WindowsDocument,
  WindowView,
} from "./types.ts";

/** Name and version that every result carries; the version changes whenever a number may. */
export const ENGINE = "ogee-engine 1.0.0";

export interface RecordingInput {
  /** As given by the caller; stands in the result. */
  file: string;
  sha256: string;
  signals: Signals;
}

/** Bytes → Signals. @throws EngineError */
export declare function readRecording(bytes: Uint8Array, protocol: Protocol): Signals;

/** Signals → filtered, differentiated columns. @throws EngineError where a cut-off does not suit the rate */
export declare function prepare(signals: Signals, protocol: Protocol): Prepared;

/** Every perturbation that is found, also those that are excluded, by axis in protocol order, then onset. */
export declare function findWindows(prepared: Prepared, protocol: Protocol): WindowChoice[];

/** One window's fit with its traces: the call that follows a drag. `choices` are all windows of the axis (overlap). */
export declare function viewWindow(
  prepared: Prepared,
  protocol: Protocol,
  choice: WindowChoice,
  choices: WindowChoice[],
): WindowView;

/**
 * The whole analysis: the one call of the browser's worker, the headless command and the server's
 * second look. Windows that `windows` names for a recording replace the finding of onsets there.
 */
export declare function analyze(input: {
  protocol: Protocol;
  protocolSha256: string;
  recordings: RecordingInput[];
  rig: RecordingInput[];
  windows: WindowsDocument | null;
}): Result;
