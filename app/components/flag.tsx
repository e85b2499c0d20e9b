import type { ReactNode } from "react";

/** A flag: a 2-pixel ink bar, one sentence, and what to do. */
export function FlagNote({
  text,
  todo,
  children,
}: {
  text: ReactNode;
  todo?: ReactNode;
  /** A link or a button that does it. */
  children?: ReactNode;
}) {
  return (
    <div className="mt-2.5 mb-4 border-l-2 border-ink pl-2.5">
      <p className="font-semibold">{text}</p>
      {todo || children ? (
        <p className="text-sm text-ink-2">
          {todo}
          {todo && children ? " " : null}
          {children}
        </p>
      ) : null}
    </div>
  );
}
