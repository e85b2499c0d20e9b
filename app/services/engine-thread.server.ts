import { existsSync } from "node:fs";
import { dirname, join } from "node:path";
import { fileURLToPath } from "node:url";
import { Worker } from "node:worker_threads";
import type { RecordingFacts } from "#app/domain/recording.ts";
import type { Protocol, Result, WindowsDocument } from "#app/engine/types.ts";

export interface EngineRefusal {
  status: "refused";
  sentence: string;
  /** Physical line of the file, from 1, where one is to blame. */
  line: number | null;
  /** Dotted protocol field, where one is to blame. */
  field: string | null;
}

/** The engine broke on this very input: a fault of ours, which the same input would meet again. */
export interface EngineFailure {
  status: "failed";
  /** For the log, with where it happened. */
  reason: string;
}

/**
 * The engine in one thread of its own, started at the first call and used again. A call rejects
 * where the thread is lost under it; the next one starts a new thread.
 */
export interface EngineThread {
  /** What a reader sees in the file. The bytes are moved away: the caller's array is empty after. */
  readFacts(
    bytes: Uint8Array<ArrayBuffer>,
    protocol: Protocol,
  ): Promise<{ status: "read"; facts: RecordingFacts } | EngineRefusal | EngineFailure>;
  /** The whole analysis of one recording. The bytes are moved away too. */
  analyze(
    bytes: Uint8Array<ArrayBuffer>,
    protocol: Protocol,
    fit: { file: string; sha256: string; protocolSha256: string; windows: WindowsDocument },
  ): Promise<{ status: "analyzed"; result: Result } | EngineRefusal | EngineFailure>;
  /** Ends the thread; what is under way or comes later is rejected. */
  close(): Promise<void>;
}

type Outcome =
  | { status: "read"; facts: RecordingFacts }
  | { status: "analyzed"; result: Result }
  | EngineRefusal
  | EngineFailure;

interface Call {
  resolve: (outcome: Outcome) => void;
  reject: (error: Error) => void;
}

interface Running {
  worker: Worker;
  /** Calls that this thread has not answered; another thread's are not its to reject. */
  waiting: Map<number, Call>;
}

/** @param thread  another script than the engine's, for tests */
export function createEngineThread(thread = findThread()): EngineThread {
  let running: Running | null = null;
  let lastId = 0;
  let isClosed = false;

  function start(): Running {
    // The parent's own flags (a loader, an inspector) are not for the thread.
    const worker = new Worker(thread, { execArgv: [] });
    const waiting = new Map<number, Call>();
    const started = { worker, waiting };
    worker.on("message", (answer: { id: number; outcome?: Outcome; error?: string }) => {
      const call = waiting.get(answer.id);
      waiting.delete(answer.id);
      if (waiting.size === 0) worker.unref();
      call?.resolve(answer.outcome ?? { status: "failed", reason: answer.error ?? "none given" });
    });
    const lost = (error: Error) => {
      if (running === started) running = null;
      for (const call of waiting.values()) call.reject(error);
      waiting.clear();
    };
    worker.on("error", lost);
    worker.on("exit", () => lost(new Error("The engine's thread ended.")));
    return started;
  }

  function call(bytes: Uint8Array<ArrayBuffer>, task: object): Promise<Outcome> {
    if (isClosed) return Promise.reject(new Error("The engine's thread is closed."));
    running ??= start();
    const { worker, waiting } = running;
    lastId += 1;
    const id = lastId;
    return new Promise((resolve, reject) => {
      worker.postMessage({ id, bytes, ...task }, [bytes.buffer]);
      waiting.set(id, { resolve, reject });
      // An idle thread keeps no process alive, a busy one does.
      worker.ref();
    });
  }

  return {
    readFacts: async (bytes, protocol) => {
      const outcome = await call(bytes, { protocol, fit: null });
      if (outcome.status === "analyzed") throw new Error("The engine answered another question.");
      return outcome;
    },
    analyze: async (bytes, protocol, fit) => {
      const outcome = await call(bytes, { protocol, fit });
      if (outcome.status === "read") throw new Error("The engine answered another question.");
      return outcome;
    },
    close: async () => {
      isClosed = true;
      await running?.worker.terminate();
    },
  };
}

/** From the source as well as from the built server. */
function findThread(): string {
  const path = join("app", "workers", "engine.thread.mjs");
  let folder = dirname(fileURLToPath(import.meta.url));
  while (!existsSync(join(folder, path))) {
    const parent = dirname(folder);
    if (parent === folder) throw new Error(`The engine's thread ${path} is missing.`);
    folder = parent;
  }
  return join(folder, path);
}
