import type { ReactNode } from "react";
import { Link } from "react-router";
import { Mark } from "./mark.tsx";

export interface SpinePlace {
  to: string;
  name: string;
  /** You are there, or at something that lies there. */
  current: boolean;
  /** What stands there or waits there. */
  count?: number;
  /** Read out behind the count ("fits to review"). */
  countOf?: string;
}

/** A list of places; the ogee marks the one where you are. */
export function SpinePlaces({ places, label }: { places: SpinePlace[]; label: string }) {
  return (
    <nav aria-label={label}>
      <ul>
        {places.map((place) => (
          <li key={place.to}>
            <Link
              aria-current={place.current ? "page" : undefined}
              className="grid min-h-7 grid-cols-[1fr_auto] items-center py-1 pr-3 decoration-edge underline-offset-3 hover:underline aria-[current]:font-semibold"
              to={place.to}
            >
              <span>
                {place.name}
                {place.current ? (
                  <span className="ml-2">
                    <Mark size="place" />
                  </span>
                ) : null}
              </span>
              {place.count ? (
                <span className="num text-ink-2">
                  {place.count}
                  {place.countOf ? <span className="sr-only"> {place.countOf}</span> : null}
                </span>
              ) : null}
            </Link>
          </li>
        ))}
      </ul>
    </nav>
  );
}

/** Left spine on a wide screen; a bar with a menu on a narrow one. */
export function Spine({
  where,
  children,
  menuKey,
}: {
  /** Lab and study, in small letters below the name. */
  where: ReactNode;
  children: ReactNode;
  /** Changes with the address, so that the menu closes when you have arrived. */
  menuKey: string;
}) {
  const brand = (
    <Link className="flex items-center gap-2 text-xl leading-6 font-semibold" to="/">
      <Mark />
      Ogee
    </Link>
  );
  return (
    <>
      <header className="hidden border-r border-rule md:block">
        <div className="sticky top-0 flex h-dvh flex-col overflow-y-auto pt-4 pl-4">
          <div className="mb-3">{brand}</div>
          <div className="mr-2 mb-3 text-sm text-ink-2">{where}</div>
          {children}
        </div>
      </header>
      <header className="border-b border-rule md:hidden">
        <details className="group" key={menuKey}>
          <summary className="flex min-h-12 list-none items-center gap-3 px-5 [&::-webkit-details-marker]:hidden">
            <Mark />
            <span className="min-w-0 grow truncate text-sm text-ink-2">{where}</span>
            <span className="rounded border border-edge bg-sheet px-2.5 py-1 whitespace-nowrap">
              <span className="group-open:hidden">Menu</span>
              <span className="hidden group-open:inline">Close</span>
            </span>
          </summary>
          <div className="flex flex-col gap-3 px-5 pb-4">{children}</div>
        </details>
      </header>
    </>
  );
}
