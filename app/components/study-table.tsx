import { Link } from "react-router";
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
            <th scope="col">rig</th>
            <th className="r" scope="col">
              participants
            </th>
            <th className="r" scope="col">
              recordings
            </th>
            <th className="r" scope="col">
              no fit yet
            </th>
            <th className="r" scope="col">
              draft
            </th>
            <th className="r" scope="col">
              submitted
            </th>
            <th className="r" scope="col">
              returned
            </th>
            <th className="r" scope="col">
              approved
            </th>
          </tr>
        </thead>
        <tbody>
          {studies.map((study) => (
            <tr key={study.id}>
              <th className="min-w-48" scope="row">
                <Link className="link" to={`/studies/${study.id}`}>
                  {study.name}
                </Link>
                {study.origin ? (
                  <span className="unit block whitespace-normal">{study.origin}</span>
                ) : null}
              </th>
              <td className="text-ink-2">{study.rigName ?? "–"}</td>
              <td className="r num">{study.participants}</td>
              <td className="r num">{study.recordings}</td>
              <CountCell count={recordingsWithoutFit(study)} state="recorded" />
              <CountCell count={study.fits.draft} state="draft" />
              <CountCell count={study.fits.submitted} state="submitted" />
              <CountCell count={study.fits.returned} state="returned" />
              <CountCell count={study.fits.approved} state="approved" />
            </tr>
          ))}
        </tbody>
      </table>
    </div>
  );
}

function CountCell({
  count,
  state,
}: {
  count: number;
  state: "recorded" | "draft" | "submitted" | "returned" | "approved";
}) {
  return (
    <td className="r num">
      {count === 0 ? (
        <span className="text-ink-2">0</span>
      ) : (
        <span className="inline-flex items-center gap-1">
          <StateMark silent state={state} />
          {count}
        </span>
      )}
    </td>
  );
}
