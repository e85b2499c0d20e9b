import { Children, type ReactNode } from "react";

/** Title, the facts below it in one line, and what can be done here at the right. */
export function PageHead({
  title,
  facts = [],
  actions,
}: {
  title: ReactNode;
  /** Short facts; numbers and file names as `<span className="num">`. */
  facts?: ReactNode[];
  actions?: ReactNode;
}) {
  return (
    <header className="mb-4 flex flex-wrap items-start justify-between gap-x-6 gap-y-2">
      <div className="min-w-0">
        <h1>{title}</h1>
        {facts.length > 0 ? (
          <ul className="flex flex-wrap items-center gap-x-4 text-ink-2">
            {Children.map(facts, (fact) => (
              <li>{fact}</li>
            ))}
          </ul>
        ) : null}
      </div>
      {actions ? <div className="flex flex-wrap items-center gap-2">{actions}</div> : null}
    </header>
  );
}
