import { Children, type ReactNode } from "react";

/** Title with what can be done beside it; the facts below have the whole line. */
export function RecordingHead({
  title,
  facts,
  actions,
}: {
  title: string;
  facts: ReactNode[];
  actions: ReactNode;
}) {
  return (
    <header className="mb-4">
      <div className="mb-1 flex flex-wrap items-center justify-between gap-x-6 gap-y-1">
        <h1>{title}</h1>
        <div className="flex flex-wrap items-center gap-2">{actions}</div>
      </div>
      <ul className="flex flex-wrap items-center gap-x-4 gap-y-1 text-ink-2">
        {Children.map(facts, (fact) => (
          <li className="min-w-0">{fact}</li>
        ))}
      </ul>
    </header>
  );
}
