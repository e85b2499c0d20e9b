import type {
  FileHead,
  FileReading,
  OpenedRecording,
  Protocol,
  Result,
  Stretch,
  StretchRequest,
  TableProtocol,
  ViewAllRequest,
  ViewRequest,
  WindowDrawing,
  WindowsDocument,
} from "#app/engine/types.ts";

/** What the page asks of the worker, and the shapes that cross between them. */
export interface EngineApi {
  /** Fetches, hashes, reads and prepares one recording, which the worker then holds. */
  open(
    recording: RecordingSource,
    onProgress: (progress: Progress) => void,
  ): Promise<OpenedRecording>;
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
  /** A glance at a file that is not taken in yet. */
  lookAtHead(
    file: Blob,
    table: TableProtocol,
    axes: readonly { name: string; label: string }[],
  ): Promise<FileHead>;
  /** A whole file, read with a map before it is taken in. */
  readWhole(file: Blob, protocol: Protocol): Promise<FileReading>;
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
