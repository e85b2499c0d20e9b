import { proxy, type Remote, transfer, wrap } from "comlink";
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
import type { EngineApi, EngineProblemCode, Progress, RecordingSource } from "./engine.api.ts";

/** One worker, and a promise that fails when it dies: calls that are pending then never settle. */
interface Seat {
  worker: Worker;
  api: Remote<EngineApi>;
  broken: Promise<never>;
  fail(error: Error): void;
}

function takeSeat(): Seat {
  const worker = new Worker(new URL("./engine.worker.ts", import.meta.url), { type: "module" });
  let fail: (error: Error) => void = () => {};
  const broken = new Promise<never>((_, reject) => {
    fail = reject;
  });
  broken.catch(() => {});
  const stopped = () => fail(problem("stopped", "The engine stopped working in this browser."));
  worker.addEventListener("error", stopped);
  worker.addEventListener("messageerror", stopped);
  return { worker, api: wrap<EngineApi>(worker), broken, fail };
}

/**
 * The engine of one recording. Two workers: one answers what is drawn, the other pools, so that a
 * drag never waits for the bootstrap. All calls fail with an EngineProblemCode as the error's name.
 */
export class EngineClient {
  readonly #drawing = takeSeat();
  #pooling: Seat | null = null;
  #handedOver: Promise<void> | null = null;

  open(
    source: RecordingSource,
    onProgress: (progress: Progress) => void,
  ): Promise<OpenedRecording> {
    return this.#ask(this.#drawing, this.#drawing.api.open(source, proxy(onProgress)));
  }

  stretch(request: StretchRequest): Promise<Stretch> {
    return this.#ask(this.#drawing, this.#drawing.api.stretch(request));
  }

  view(request: ViewRequest): Promise<WindowDrawing> {
    return this.#ask(this.#drawing, this.#drawing.api.view(request));
  }

  viewAll(request: ViewAllRequest): Promise<WindowDrawing[]> {
    return this.#ask(this.#drawing, this.#drawing.api.viewAll(request));
  }

  /** The document that is saved: the same call as the headless command's. */
  async analyze(windows: WindowsDocument): Promise<Result> {
    this.#pooling ??= takeSeat();
    const seat = this.#pooling;
    this.#handedOver ??= this.#handOver(seat);
    await this.#handedOver;
    return this.#ask(seat, seat.api.analyze(windows));
  }

  /** Ends both workers; whatever is pending fails. */
  close(): void {
    for (const seat of [this.#drawing, this.#pooling]) {
      seat?.worker.terminate();
      seat?.fail(problem("closed", "The recording was closed."));
    }
  }

  async #handOver(seat: Seat): Promise<void> {
    const { port1, port2 } = new MessageChannel();
    const taken = seat.api.takeOver(transfer(port2, [port2]));
    await this.#ask(this.#drawing, this.#drawing.api.handOver(transfer(port1, [port1])));
    await this.#ask(seat, taken);
  }

  #ask<Answer>(seat: Seat, answer: Promise<Answer>): Promise<Answer> {
    return Promise.race([answer, seat.broken]);
  }
}

/**
 * Reads files that are not taken in yet, in a worker of its own. One that dies (a file may be larger
 * than the memory) is replaced at the next call.
 */
export class IncomingFiles {
  #seat: Seat | null = null;

  hash(file: Blob, onProgress: (bytesRead: number) => void): Promise<string> {
    return this.#ask((api) => api.hash(file, proxy(onProgress)));
  }

  lookAtHead(
    file: Blob,
    table: TableProtocol,
    axes: readonly { name: string; label: string }[],
  ): Promise<FileHead> {
    return this.#ask(async (api) => api.lookAtHead(file, table, axes));
  }

  readWhole(file: Blob, protocol: Protocol): Promise<FileReading> {
    return this.#ask(async (api) => api.readWhole(file, protocol));
  }

  close(): void {
    this.#seat?.worker.terminate();
    this.#seat?.fail(problem("closed", "The page was left."));
    this.#seat = null;
  }

  async #ask<Answer>(ask: (api: Remote<EngineApi>) => Promise<Answer>): Promise<Answer> {
    this.#seat ??= takeSeat();
    const seat = this.#seat;
    try {
      return await Promise.race([ask(seat.api), seat.broken]);
    } catch (error) {
      if (error instanceof Error && error.name === "stopped") {
        seat.worker.terminate();
        if (this.#seat === seat) this.#seat = null;
      }
      throw error;
    }
  }
}

function problem(code: EngineProblemCode, message: string): Error {
  const error = new Error(message);
  error.name = code;
  return error;
}
