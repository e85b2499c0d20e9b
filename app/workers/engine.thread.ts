/**
 * The engine in a thread of the server: the same pipeline as in the browser's worker, so that a
 * saved fit can be computed a second time without holding up a request.
 */
import { parentPort } from "node:worker_threads";
import { analyze, readRecording } from "#app/engine/pipeline.ts";
import type { Protocol, Result, Signals, WindowsDocument } from "#app/engine/types.ts";

interface Task {
  id: number;
  /** Moved here, not copied. */
  bytes: Uint8Array;
  protocol: Protocol;
  /** Null where only the facts are asked for. */
  fit: {
    file: string;
    sha256: string;
    protocolSha256: string;
    windows: WindowsDocument;
  } | null;
}

type Outcome =
  | {
      status: "read";
      facts: Pick<
        Signals,
        "samples" | "rateHz" | "durationS" | "gaps" | "duplicates" | "missing" | "flags"
      >;
    }
  | { status: "analyzed"; result: Result }
  | { status: "refused"; sentence: string; line: number | null; field: string | null };

function run({ bytes, protocol, fit }: Task): Outcome {
  try {
    const signals = readRecording(bytes, protocol);
    if (fit === null) {
      const { samples, rateHz, durationS, gaps, duplicates, missing, flags } = signals;
      return {
        status: "read",
        facts: { samples, rateHz, durationS, gaps, duplicates, missing, flags },
      };
    }
    const result = analyze({
      protocol,
      protocolSha256: fit.protocolSha256,
      recordings: [{ file: fit.file, sha256: fit.sha256, signals }],
      rig: [],
      windows: fit.windows,
    });
    return { status: "analyzed", result };
  } catch (error) {
    // Names are compared, not classes: the engine's own errors carry their code in `name`.
    if (error instanceof Error && (error.name === "unreadable" || error.name === "protocol")) {
      const at = error as Error & { line?: number | null; field?: string | null };
      return {
        status: "refused",
        sentence: error.message,
        line: at.line ?? null,
        field: at.field ?? null,
      };
    }
    throw error;
  }
}

parentPort?.on("message", (task: Task) => {
  let answer: { id: number; outcome: Outcome } | { id: number; error: string };
  try {
    answer = { id: task.id, outcome: run(task) };
  } catch (error) {
    answer = {
      id: task.id,
      error: error instanceof Error ? (error.stack ?? error.message) : String(error),
    };
  }
  parentPort?.postMessage(answer);
});
