import { Link } from "react-router";
import type { CellState } from "#app/domain/recording.ts";
import { recordingsWithoutFit, type StudyProgress } from "#app/domain/task.ts";
import { StateMark } from "./state-mark.tsx";

/** Studies with how far they have come, one line each. */
export function StudyTable({
  studies,
}: {
  studies: (StudyProgress & { origin: string | null; rigName: string | null })[];
}) {
  return (
    <div className="wide">
      <table className="rows">
        <thead>
          <tr>
            <th scope="col">study</th>
            <th className="max-md:hidden" scope="col">
              rig
            </th>
            <th className="r max-md:hidden" scope="col">
              participants
            </th>
            <th className="r max-md:hidden" scope="col">
              recordings
            </th>
            <StateHead state="recorded">no fit yet</StateHead>
            <StateHead state="draft">draft</StateHead>
            <StateHead state="submitted">submitted</StateHead>
            <StateHead state="returned">returned</StateHead>
            <StateHead state="approved">approved</StateHead>
          </tr>
        </thead>
        <tbody>
          {studies.map((study) => (
            <tr key={study.id}>
              <th className="min-w-40" scope="row">
                <Link className="link" to={`/studies/${study.id}`}>
                  {study.name}
                </Link>
                {study.origin ? (
                  <span className="unit block whitespace-normal">{study.origin}</span>
                ) : null}
              </th>
              <td className="text-ink-2 max-md:hidden">{study.rigName ?? "–"}</td>
              <td className="r num max-md:hidden">{study.participants}</td>
              <td className="r num max-md:hidden">{study.recordings}</td>
              <CountCell count={recordingsWithoutFit(study)} />
              <CountCell count={study.fits.draft} />
              <CountCell count={study.fits.submitted} />
              <CountCell count={study.fits.returned} />
              <CountCell count={study.fits.approved} />
            </tr>
          ))}
        </tbody>
      </table>
    </div>
  );
}

/** A column's state: its mark and its word. */
function StateHead({ state, children }: { state: CellState; children: string }) {
  return (
    <th className="r" scope="col">
      <span className="inline-flex items-center gap-1 align-bottom" title={children}>
        <StateMark silent state={state} />
        <span className="max-md:sr-only">{children}</span>
      </span>
    </th>
  );
}

function CountCell({ count }: { count: number }) {
  return <td className={`r num ${count === 0 ? "text-ink-2" : ""}`}>{count}</td>;
}
