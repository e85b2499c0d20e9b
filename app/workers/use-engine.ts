import { useCallback, useEffect, useState } from "react";
import type { OpenedRecording } from "#app/engine/types.ts";
import type { EngineProblemCode, Progress, RecordingSource } from "./engine.api.ts";
import type { EngineClient } from "./engine.client.ts";

export interface EngineProblem {
  code: EngineProblemCode;
  /** What happened, to what: one sentence. */
  text: string;
}

/** A recording on its way into the browser, there, or not to be had. */
export type EngineState =
  | { status: "opening"; progress: Progress | null }
  | { status: "ready"; opened: OpenedRecording; engine: EngineClient; source: RecordingSource }
  | { status: "failed"; problem: EngineProblem };

const CODES: readonly EngineProblemCode[] = [
  "unreadable",
  "protocol",
  "unreachable",
  "missing",
  "signed_out",
  "changed",
  "stopped",
  "closed",
];

/** What a worker's error says; an error without a known code is one of the engine itself. */
export function problemOf(error: unknown): EngineProblem {
  const { name, message } = error instanceof Error ? error : new Error(String(error));
  const code = CODES.find((known) => known === name);
  return code === undefined
    ? { code: "stopped", text: `The engine stopped: ${message}` }
    : { code, text: message };
}

/**
 * Opens a recording in the worker, and again when the recording or the protocol changes.
 *
 * @param source  null where nothing is to be opened yet
 */
export function useEngine(source: RecordingSource | null): EngineState & { retry: () => void } {
  const [state, setState] = useState<EngineState>({ status: "opening", progress: null });
  const [attempt, setAttempt] = useState(0);
  const key = source === null ? null : `${source.url} ${source.sha256} ${source.protocolSha256}`;

  // biome-ignore lint/correctness/useExhaustiveDependencies: the key stands for the source, whose object is new with each render; the attempt asks for another try.
  useEffect(() => {
    if (source === null) return;
    let gone = false;
    let client: EngineClient | null = null;
    setState({ status: "opening", progress: null });
    (async () => {
      const { EngineClient: Client } = await import("./engine.client.ts");
      if (gone) return;
      const engine = new Client();
      client = engine;
      const opened = await engine.open(source, (progress) => {
        if (!gone) setState({ status: "opening", progress });
      });
      if (!gone) setState({ status: "ready", opened, engine, source });
    })().catch((error) => {
      client?.close();
      if (!gone) setState({ status: "failed", problem: problemOf(error) });
    });
    return () => {
      gone = true;
      client?.close();
    };
  }, [key, attempt]);

  const retry = useCallback(() => setAttempt((count) => count + 1), []);
  return { ...state, retry };
}
