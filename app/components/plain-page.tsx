import type { ReactNode } from "react";
import { Mark } from "./mark.tsx";

/** A page outside a lab (sign in, choose a lab, what went wrong): the name, then one narrow column. */
export function PlainPage({ children }: { children: ReactNode }) {
  return (
    <div className="mx-auto flex min-h-dvh w-full max-w-md flex-col gap-8 px-5 py-10">
      <header>
        <p className="flex items-center gap-2 text-xl font-semibold">
          <Mark />
          Ogee
        </p>
      </header>
      <main id="main" tabIndex={-1}>
        {children}
      </main>
    </div>
  );
}
