import type { ReactNode } from "react";
import { Mark } from "./mark.tsx";

/** An empty state: the ogee, what will stand here, and the first step for who may take it. */
export function Empty({ text, children }: { text: ReactNode; children?: ReactNode }) {
  return (
    <div className="flex max-w-prose flex-col items-start gap-4 py-6">
      <span className="text-aside">
        <Mark size="sketch" />
      </span>
      <p>{text}</p>
      {children ? <div className="flex flex-wrap items-center gap-2">{children}</div> : null}
    </div>
  );
}
