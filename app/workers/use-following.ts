import { useCallback, useEffect, useMemo, useRef, useState } from "react";
import type { Result, WindowChoice, WindowsDocument } from "#app/engine/types.ts";
import type {
  Stretch,
  StretchRequest,
  ViewAllRequest,
  ViewRequest,
  WindowDrawing,
} from "./engine.api.ts";
import type { EngineClient } from "./engine.client.ts";
import { newestWins } from "./newest-wins.ts";
import { type EngineProblem, problemOf } from "./use-engine.ts";

/** Points across a small view. */
const SMALL_PIXELS = 120;
/** A pause after the last edit before all windows are pooled. */
const POOL_AFTER_MS = 120;

/** A question with the answer that stands for it. */
interface Answered<Question, Answer> {
  question: Question;
  answer: Answer;
}

/**
 * Asks the engine for what a screen shows and keeps the newest answer.
 *
 * @param question  null where there is nothing to ask
 */
function useNewest<Question, Answer>(
  engine: EngineClient | null,
  question: Question | null,
  ask: (engine: EngineClient, question: Question) => Promise<Answer>,
  onProblem: (problem: EngineProblem) => void,
  afterMs = 0,
): Answered<Question, Answer> | null {
  const [held, setHeld] = useState<
    (Answered<Question, Answer> & { engine: EngineClient | null }) | null
  >(null);
  const send = useMemo(() => {
    if (engine === null) return null;
    return newestWins(
      (asked: Question) => ask(engine, asked),
      (answer, asked) => setHeld({ engine, question: asked, answer }),
      (error) => report(error, onProblem),
      "drop",
    );
  }, [engine, ask, onProblem]);
  useEffect(() => {
    if (send === null || question === null) return;
    if (afterMs === 0) {
      send(question);
      return;
    }
    const timer = setTimeout(() => send(question), afterMs);
    return () => clearTimeout(timer);
  }, [send, question, afterMs]);
  return held?.engine === engine ? held : null;
}

/** What was still under way when a recording was closed is nobody's problem. */
function report(error: unknown, onProblem: (problem: EngineProblem) => void): void {
  const problem = problemOf(error);
  if (problem.code !== "closed") onProblem(problem);
}

const askStretch = (engine: EngineClient, request: StretchRequest) => engine.stretch(request);
const askViews = (engine: EngineClient, request: ViewAllRequest) => engine.viewAll(request);
const askResult = (engine: EngineClient, windows: WindowsDocument) => engine.analyze(windows);

/** Filtered columns of a range; the last ones stay until the new ones are there. */
export function useStretch(
  engine: EngineClient | null,
  request: StretchRequest | null,
  onProblem: (problem: EngineProblem) => void,
): Stretch | null {
  return useNewest(engine, request, askStretch, onProblem)?.answer ?? null;
}

export interface Fits {
  /** Each window with its fit, small enough for a small view; null until they are there. */
  drawings: readonly { choice: WindowChoice; drawing: WindowDrawing }[] | null;
  /** The document that would be saved; null until it is of these very windows. */
  result: Result | null;
  /** The last one, for showing while a newer one is made. */
  lastResult: Result | null;
}

/** All windows' fits and the pooled values: after each edit, not during a drag. */
export function useFits(
  engine: EngineClient | null,
  document: WindowsDocument | null,
  onProblem: (problem: EngineProblem) => void,
): Fits {
  const request = useMemo(
    () =>
      document === null
        ? null
        : {
            choices: document.windows.map(({ recording_sha256: _, ...choice }) => choice),
            pixels: SMALL_PIXELS,
          },
    [document],
  );
  const views = useNewest(engine, request, askViews, onProblem);
  const analysis = useNewest(engine, document, askResult, onProblem, POOL_AFTER_MS);
  return useMemo(
    () => ({
      drawings:
        views?.answer.map((drawing, i) => ({
          choice: views.question.choices[i] as WindowChoice,
          drawing,
        })) ?? null,
      result: analysis !== null && analysis.question === document ? analysis.answer : null,
      lastResult: analysis?.answer ?? null,
    }),
    [views, analysis, document],
  );
}

/** A window on its way, with the stamp of the input event that sent it there. */
export interface FollowRequest extends ViewRequest {
  eventTime: number;
}

/**
 * One window's fit, following a hand: one question in flight, the newest wins, and what was
 * answered on the way is shown.
 */
export function useFollow(
  engine: EngineClient | null,
  onDrawing: (drawing: WindowDrawing, request: FollowRequest) => void,
  onProblem: (problem: EngineProblem) => void,
): (request: FollowRequest) => void {
  const answered = useRef(onDrawing);
  answered.current = onDrawing;
  const send = useMemo(
    () =>
      engine === null
        ? null
        : newestWins(
            ({ eventTime: _, ...request }: FollowRequest) => engine.view(request),
            (drawing, request) => answered.current(drawing, request),
            (error) => report(error, onProblem),
            "show",
          ),
    [engine, onProblem],
  );
  return useCallback((request) => send?.(request), [send]);
}
