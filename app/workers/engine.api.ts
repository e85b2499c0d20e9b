import type {
  Flag,
  Protocol,
  Result,
  ResultWindow,
  WindowChoice,
  WindowsDocument,
} from "#app/engine/types.ts";

/** What the page asks of the worker, and the shapes that cross between them. */
export interface EngineApi {
  /** Fetches, hashes, reads and prepares one recording, which the worker then holds. */
  open(recording: RecordingSource, onProgress: (progress: Progress) => void): Promise<Opened>;
  /** Filtered columns of a range of time, thinned to the pixels that will show them. */
  stretch(request: StretchRequest): Stretch;
  /** One window's fit: the call that follows a drag. */
  view(request: ViewRequest): WindowDrawing;
  /** All windows' fits, in the order given. */
  viewAll(request: ViewAllRequest): WindowDrawing[];
  /** Gives what was read to another worker, so that pooling never delays a drag. */
  handOver(port: MessagePort): void;
  /** Takes what another worker has read. */
  takeOver(port: MessagePort): Promise<void>;
  /** The whole analysis, as the headless command makes it. */
  analyze(windows: WindowsDocument): Result;
  /** SHA-256 of a file, read in pieces. */
  hash(file: Blob, onProgress: (bytesRead: number) => void): Promise<string>;
}

export interface RecordingSource {
  url: string;
  /** As it stands in the result. */
  fileName: string;
  sizeBytes: number;
  sha256: string;
  protocol: Protocol;
  /** Of the PROTOCOL text, byte for byte as the server compiled it. */
  protocolSha256: string;
}

export interface Progress {
  step: "fetching" | "reading" | "preparing";
  bytesRead: number;
  bytesTotal: number;
}

export interface Opened {
  samples: number;
  rateHz: number;
  /** First and last stamp in the file's own time, s. */
  startS: number;
  endS: number;
  flags: Flag[];
  /** Every window that the engine finds, also those that it leaves out. */
  found: WindowChoice[];
  emg: { muscle: string; unit: "V" | "1" }[];
}

export interface StretchRequest {
  axis: string;
  fromS: number;
  toS: number;
  pixels: number;
}

export interface Stretch {
  axis: string;
  timeS: Float64Array;
  angleDeg: Float64Array;
  velocityDegPerS: Float64Array;
  /** Low-passed, as recorded: background and rig are in it. */
  torqueNm: Float64Array;
  /** As recorded, in the order of `Opened.emg`. */
  emg: Float64Array[];
}

export interface ViewRequest {
  choice: WindowChoice;
  /** All windows of the axis. */
  choices: WindowChoice[];
  pixels: number;
}

export interface ViewAllRequest {
  choices: WindowChoice[];
  pixels: number;
}

export interface WindowDrawing {
  window: ResultWindow;
  /** Each term's largest |torque| over the sum of the three; null where a term is absent. */
  share: { K: number | null; B: number | null; I: number | null } | null;
  /** Null where the window is not fitted. */
  lines: {
    /** In the file's own time, s. */
    timeS: Float64Array;
    /** Relative to the baseline, degrees. */
    angleDeg: Float64Array;
    /** As recorded and as the model has it, background and rig in both, N·m. */
    measuredNm: Float64Array;
    modelledNm: Float64Array;
    residualNm: Float64Array;
    /** Each term's share of the modelled torque, N·m. */
    termsNm: { K: Float64Array; B: Float64Array; I: Float64Array };
  } | null;
}

/** What can go wrong; the code stands in an error's name, which survives the way to the page. */
export type EngineProblemCode =
  | "unreadable"
  | "protocol"
  | "unreachable"
  | "missing"
  | "signed_out"
  | "changed"
  | "stopped"
  | "closed";
