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

/** The engine in one thread of its own, started at the first call and used again. */
export interface EngineThread {
  /** What a reader sees in the file. The bytes are moved away: the caller's array is empty after. */
  readFacts(
    bytes: Uint8Array<ArrayBuffer>,
    protocol: Protocol,
  ): Promise<{ status: "read"; facts: RecordingFacts } | EngineRefusal>;
  /** The whole analysis of one recording. The bytes are moved away too. */
  analyze(
    bytes: Uint8Array<ArrayBuffer>,
    protocol: Protocol,
    fit: { file: string; sha256: string; protocolSha256: string; windows: WindowsDocument },
  ): Promise<{ status: "analyzed"; result: Result } | EngineRefusal>;
  /** Ends the thread; what is under way or comes later is rejected. */
  close(): Promise<void>;
}

type Outcome =
  | { status: "read"; facts: RecordingFacts }
  | { status: "analyzed"; result: Result }
  | EngineRefusal;

export function createEngineThread(): EngineThread {
  let worker: Worker | null = null;
  let lastId = 0;
  let isClosed = false;
  const waiting = new Map<
    number,
    { resolve: (outcome: Outcome) => void; reject: (error: Error) => void }
  >();

  function start(): Worker {
    // The parent's own flags (a loader, an inspector) are not for the thread.
    const started = new Worker(findThread(), { execArgv: [] });
    started.on("message", (answer: { id: number; outcome?: Outcome; error?: string }) => {
      const call = waiting.get(answer.id);
      waiting.delete(answer.id);
      if (waiting.size === 0) started.unref();
      if (answer.outcome) call?.resolve(answer.outcome);
      else call?.reject(new Error(`The engine failed: ${answer.error ?? "no reason given"}`));
    });
    const lost = (error: Error) => {
      if (worker === started) worker = null;
      for (const call of waiting.values()) call.reject(error);
      waiting.clear();
    };
    started.on("error", lost);
    started.on("exit", () => lost(new Error("The engine's thread ended.")));
    return started;
  }

  function call(bytes: Uint8Array<ArrayBuffer>, task: object): Promise<Outcome> {
    if (isClosed) return Promise.reject(new Error("The engine's thread is closed."));
    worker ??= start();
    const thread = worker;
    lastId += 1;
    const id = lastId;
    return new Promise((resolve, reject) => {
      waiting.set(id, { resolve, reject });
      // An idle thread keeps no process alive, a busy one does.
      thread.ref();
      thread.postMessage({ id, bytes, ...task }, [bytes.buffer]);
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
      await worker?.terminate();
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
