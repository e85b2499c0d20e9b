import { CELL_STATES, type CellState } from "#app/domain/recording.ts";

/** What each state means, for a title or a key. */
export const STATE_MEANINGS: Record<CellState, string> = {
  nothing: "no recording yet",
  recorded: "taken in, no windows found yet",
  windowed: "windows found, nothing saved",
  draft: "a fit is saved, not yet submitted",
  submitted: "waits for a reviewer",
  returned: "sent back by a reviewer",
  approved: "approved by a reviewer",
};

function Shape({ state }: { state: CellState }) {
  const ring = (
    <circle cx="10" cy="10" fill="none" r="5.5" stroke="currentColor" strokeWidth="1.5" />
  );
  const half = <path d="M10 4.5A5.5 5.5 0 0 1 10 15.5Z" fill="currentColor" />;
  switch (state) {
    case "nothing":
      return <path d="M6.5 10H13.5" stroke="currentColor" strokeWidth="1.5" />;
    case "recorded":
      return <circle cx="10" cy="10" fill="currentColor" r="2.5" />;
    case "windowed":
      return ring;
    case "draft":
      return (
        <>
          {ring}
          {half}
        </>
      );
    case "submitted":
      return (
        <>
          {ring}
          {half}
          <path d="M4 18.5H16" stroke="currentColor" strokeWidth="1.5" />
        </>
      );
    case "returned":
      return (
        <>
          {ring}
          <path d="M5.5 14.5L14.5 5.5" stroke="currentColor" strokeWidth="1.5" />
        </>
      );
    case "approved":
      return <circle cx="10" cy="10" fill="currentColor" r="6" />;
  }
}

/**
 * One of seven shapes, never a colour. With `word` the state's name stands beside it; without, the
 * word is read out and shown as title (pass `silent` where a label already says it).
 */
export function StateMark({
  state,
  word = false,
  silent = false,
}: {
  state: CellState;
  word?: boolean;
  silent?: boolean;
}) {
  const drawing = (
    <svg
      aria-hidden="true"
      className={`block shrink-0 ${state === "nothing" ? "text-aside" : ""}`}
      height="20"
      viewBox="0 0 20 20"
      width="20"
    >
      {silent || word ? null : <title>{state}</title>}
      <Shape state={state} />
    </svg>
  );
  if (word) {
    return (
      <span className="inline-flex items-center gap-1.5 align-middle whitespace-nowrap">
        {drawing}
        {state}
      </span>
    );
  }
  return (
    <span className="inline-flex align-middle" title={silent ? undefined : state}>
      {drawing}
      {silent ? null : <span className="sr-only">{state}</span>}
    </span>
  );
}

/** The seven marks with their words. */
export function StateKey() {
  return (
    <ul
      aria-label="What the marks mean"
      className="flex flex-wrap gap-x-4 gap-y-1 text-sm text-ink-2"
    >
      {CELL_STATES.map((state) => (
        <li key={state} title={STATE_MEANINGS[state]}>
          <StateMark state={state} word />
        </li>
      ))}
    </ul>
  );
}
