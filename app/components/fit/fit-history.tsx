import { Link } from "react-router";
import { StateMark } from "#app/components/state-mark.tsx";
import { formatMoment } from "#app/domain/quantity.ts";
import type { CellState } from "#app/domain/recording.ts";

export interface HistoryLine {
  id: string;
  number: number;
  state: CellState;
  verification: "unverified" | "verified" | "differs";
  protocolNumber: number;
  savedByName: string;
  savedAt: number;
  supersededAt: number | null;
}

/** Every fit of a recording, the newest first: none is overwritten. */
export function FitHistory({ fits, shownId }: { fits: readonly HistoryLine[]; shownId: string }) {
  return (
    <section aria-label="Fits of this recording">
      <h2 className="mb-1">Fits of this recording</h2>
      <ol>
        {fits.map((fit) => (
          <li
            aria-current={fit.id === shownId ? "true" : undefined}
            className="border-b border-rule py-1.5"
            key={fit.id}
          >
            <p className="flex items-center gap-2">
              {fit.id === shownId ? (
                <strong>Fit {fit.number}</strong>
              ) : (
                <Link className="link" to={`/fits/${fit.id}`}>
                  Fit {fit.number}
                </Link>
              )}
              <StateMark state={fit.state} word />
              {fit.supersededAt === null ? null : (
                <span className="text-sm text-ink-2">superseded</span>
              )}
            </p>
            <p className="text-sm text-ink-2">
              {fit.savedByName}, {formatMoment(fit.savedAt)}, protocol version {fit.protocolNumber}
              {fit.verification === "verified" ? "" : `, ${VERIFICATION_WORDS[fit.verification]}`}
            </p>
          </li>
        ))}
      </ol>
    </section>
  );
}

export const VERIFICATION_WORDS = {
  unverified: "unverified",
  verified: "verified",
  differs: "the server’s numbers differ",
} as const;
