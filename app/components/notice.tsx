import type { ReactNode } from "react";

/** What just happened, in a sentence; read out when it appears. `urgent` interrupts. */
export function Notice({ children, urgent = false }: { children: ReactNode; urgent?: boolean }) {
  return (
    <div
      aria-live={urgent ? "assertive" : "polite"}
      className="my-3 border border-rule border-l-2 border-l-ink bg-sheet px-3 py-2"
      role={urgent ? "alert" : "status"}
    >
      {children}
    </div>
  );
}
