import { useCallback, useEffect, useMemo, useRef, useState } from "react";
import type {
  Result,
  Stretch,
  StretchRequest,
  ViewAllRequest,
  ViewRequest,
  WindowChoice,
  WindowDrawing,
  WindowsDocument,
} from "#app/engine/types.ts";
import { newestWins } from "./newest-wins.ts";

/** The engine of one open recording, wherever it runs. */
export interface EnginePort {
  stretch(request: StretchRequest): Promise<Stretch>;
  view(request: ViewRequest): Promise<WindowDrawing>;
  viewAll(request: ViewAllRequest): Promise<WindowDrawing[]>;
  /** The document that is saved: the same call as the headless command's. */
  analyze(windows: WindowsDocument): Promise<Result>;
}

type OnProblem = (error: unknown) => void;

/** Points across a small view. */
const SMALL_PIXELS = 120;
/** A pause after the last edit before all windows are pooled. */
const POOL_AFTER_MS = 120;

interface Answered<Question, Answer> {
  port: EnginePort;
  question: Question;
  answer: Answer;
}

/**
 * Asks the engine for what a screen shows and keeps the newest answer.
 *
 * @param question  null where there is nothing to ask
 */
function useNewest<Question, Answer>(
  port: EnginePort,
  question: Question | null,
  ask: (port: EnginePort, question: Question) => Promise<Answer>,
  onProblem: OnProblem,
  afterMs = 0,
): Answered<Question, Answer> | null {
  const [held, setHeld] = useState<Answered<Question, Answer> | null>(null);
  const send = useMemo(
    () =>
      newestWins(
        (asked: Question) => ask(port, asked),
        (answer, asked) => setHeld({ port, question: asked, answer }),
        onProblem,
        "drop",
      ),
    [port, ask, onProblem],
  );
  useEffect(() => {
    if (question === null) return;
    if (afterMs === 0) {
      send(question);
      return;
    }
    const timer = setTimeout(() => send(question), afterMs);
    return () => clearTimeout(timer);
  }, [send, question, afterMs]);
  return held?.port === port ? held : null;
}

const askStretch = (port: EnginePort, request: StretchRequest) => port.stretch(request);
const askViews = (port: EnginePort, request: ViewAllRequest) => port.viewAll(request);
const askResult = (port: EnginePort, windows: WindowsDocument) => port.analyze(windows);

/** Filtered columns of a range; the last ones stay until the new ones are there. */
export function useStretch(
  port: EnginePort,
  request: StretchRequest | null,
  onProblem: OnProblem,
): Stretch | null {
  return useNewest(port, request, askStretch, onProblem)?.answer ?? null;
}

export interface Fits {
  /** Each window with its fit, thinned for a small view; null until they are there. */
  drawings: readonly { choice: WindowChoice; drawing: WindowDrawing }[] | null;
  /** The document that would be saved; null until it is of these very windows. */
  result: Result | null;
  /** The last one, for showing while a newer one is made. */
  lastResult: Result | null;
}

/** All windows' fits and the pooled values: after each edit, not during a drag. */
export function useFits(port: EnginePort, document: WindowsDocument, onProblem: OnProblem): Fits {
  const request = useMemo(
    () => ({
      choices: document.windows.map(({ recording_sha256: _, ...choice }) => choice),
      pixels: SMALL_PIXELS,
    }),
    [document],
  );
  const views = useNewest(port, request, askViews, onProblem);
  // A document that names no window would have the engine find its own.
  const toPool = document.windows.length === 0 ? null : document;
  const analysis = useNewest(port, toPool, askResult, onProblem, POOL_AFTER_MS);
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
  /** Null where no hand moved it. */
  eventTime: number | null;
}

/**
 * One window's fit, following a hand: one question in flight, the newest wins, and what was
 * answered on the way is shown.
 */
export function useFollow(
  port: EnginePort,
  onDrawing: (drawing: WindowDrawing, request: FollowRequest) => void,
  onProblem: OnProblem,
): (request: FollowRequest) => void {
  const answered = useRef(onDrawing);
  answered.current = onDrawing;
  const send = useMemo(
    () =>
      newestWins(
        ({ eventTime: _, ...request }: FollowRequest) => port.view(request),
        (drawing, request) => answered.current(drawing, request),
        onProblem,
        "show",
      ),
    [port, onProblem],
  );
  return useCallback((request) => send(request), [send]);
}
