import type { Flag } from "#app/engine/types.ts";
import { FlagList } from "./window-drawer.tsx";

/** Each flag once, however many windows carry it; the first in full, the rest behind a line. */
export function FlagSummary({ flags }: { flags: readonly Flag[] }) {
  const once = [...new Map(flags.map((flag) => [flag.code + flag.text, flag])).values()];
  const [first, ...rest] = once;
  if (!first) return null;
  return (
    <div className="-mt-2 mb-2">
      <FlagList flags={[first]} />
      {rest.length > 0 ? (
        <details>
          <summary className="min-h-6 text-sm text-ink-2">
            {rest.length === 1 ? "One more flag" : `${rest.length} more flags`}
          </summary>
          <FlagList flags={rest} />
        </details>
      ) : null}
    </div>
  );
}
