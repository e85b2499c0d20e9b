import { Link } from "react-router";
import { deskContext } from "#app/auth/context.server.ts";
import { requireActor } from "#app/auth/require.server.ts";
import { ButtonLink } from "#app/components/button.tsx";
import { Empty } from "#app/components/empty.tsx";
import { ErrorScreen } from "#app/components/error-screen.tsx";
import { PageHead } from "#app/components/page-head.tsx";
import { BarSelect, SelectBar } from "#app/components/select-bar.tsx";
import { StateKey, StateMark } from "#app/components/state-mark.tsx";
import { type ListedRecording, listRecordings } from "#app/db/recordings.server.ts";
import { findStudyPlan } from "#app/db/studies.server.ts";
import { countOf, formatBytes, formatDay, formatDigits } from "#app/domain/quantity.ts";
import { CELL_STATES, type CellState } from "#app/domain/recording.ts";
import { notFound } from "#app/domain/refusal.ts";
import { may } from "#app/domain/role.ts";
import type { Route } from "./+types/recordings.ts";

export function meta({ loaderData }: Route.MetaArgs): Route.MetaDescriptors {
  return [{ title: loaderData ? `Recordings of ${loaderData.studyName} · Ogee` : "Ogee" }];
}

export async function loader({ request, context, params }: Route.LoaderArgs) {
  const { actor, lab } = await requireActor(request, context);
  const { db } = context.get(deskContext).store;
  const plan = await findStudyPlan(db, lab.id, params.id);
  if (!plan) throw notFound();
  const all = await listRecordings(db, lab.id, plan.id);
  const wanted = new URL(request.url).searchParams;
  const filter = {
    participant: wanted.get("participant") ?? "",
    condition: wanted.get("condition") ?? "",
    state: wanted.get("state") ?? "",
  };
  const participants = new Map(all.map((one) => [one.participantId, one.participantCode]));
  return {
    studyId: plan.id,
    studyName: plan.name,
    total: all.length,
    filter,
    participants: [...participants].map(([value, label]) => ({ value, label })),
    conditions: plan.conditions.map(({ id, name }) => ({ value: id, label: name })),
    severalPostures: plan.postures.length > 1,
    recordings: all
      .filter(
        (one) =>
          (filter.participant === "" || one.participantId === filter.participant) &&
          (filter.condition === "" || one.conditionId === filter.condition) &&
          (filter.state === "" || stateOf(one) === filter.state),
      )
      .map((one) => ({ ...one, shownState: stateOf(one) })),
    mayTakeIn: may(actor, "take_in"),
  };
}

/** A file that is still being checked, or was refused, is in none of the seven states. */
function stateOf(recording: ListedRecording): CellState | "verifying" | "refused" {
  return recording.state === "ready" ? (recording.fit?.state ?? "recorded") : recording.state;
}

const STATE_OPTIONS = [
  { value: "", label: "any" },
  ...CELL_STATES.filter((state) => state !== "nothing").map((state) => ({
    value: state,
    label: state,
  })),
  { value: "verifying", label: "being checked" },
  { value: "refused", label: "refused" },
];

export default function Recordings({ loaderData }: Route.ComponentProps) {
  const { studyId, studyName, total, recordings, filter, mayTakeIn } = loaderData;
  const takeIn = mayTakeIn ? (
    <ButtonLink look="do" to={`/studies/${studyId}/take-in`}>
      Take in recordings
    </ButtonLink>
  ) : null;

  if (total === 0) {
    return (
      <>
        <PageHead title={`Recordings of ${studyName}`} />
        <Empty
          text={
            mayTakeIn
              ? "Every file that is taken in will stand here with its participant, its condition and how far it has come."
              : "Every file that is taken in will stand here. A biomechanist takes in the first one."
          }
        >
          {takeIn}
        </Empty>
      </>
    );
  }
  return (
    <>
      <PageHead
        actions={takeIn}
        facts={[
          recordings.length === total
            ? countOf(total, "recording")
            : `${recordings.length} of ${countOf(total, "recording")}`,
        ]}
        title={`Recordings of ${studyName}`}
      />
      <SelectBar label="Which recordings are shown">
        <BarSelect
          label="participant"
          name="participant"
          options={[{ value: "", label: "all" }, ...loaderData.participants]}
          value={filter.participant}
        />
        <BarSelect
          label="condition"
          name="condition"
          options={[{ value: "", label: "all" }, ...loaderData.conditions]}
          value={filter.condition}
        />
        <BarSelect label="state" name="state" options={STATE_OPTIONS} value={filter.state} />
        {recordings.length < total ? (
          <Link className="link min-h-[30px] leading-[30px]" to=".">
            Show all
          </Link>
        ) : null}
      </SelectBar>
      {recordings.length === 0 ? (
        <Empty text="None of the study’s recordings is like that. Choose another participant, condition or state." />
      ) : (
        <RecordingTable recordings={recordings} severalPostures={loaderData.severalPostures} />
      )}
      <div className="mt-4">
        <StateKey />
      </div>
    </>
  );
}

type Row = Route.ComponentProps["loaderData"]["recordings"][number];

function RecordingTable({
  recordings,
  severalPostures,
}: {
  recordings: Row[];
  severalPostures: boolean;
}) {
  return (
    <div className="wide">
      <table className="rows">
        <thead>
          <tr>
            <th scope="col">file</th>
            <th className="max-md:hidden" scope="col">
              participant
            </th>
            <th scope="col">condition</th>
            {severalPostures ? <th scope="col">posture</th> : null}
            <th scope="col">state</th>
            <th className="r max-md:hidden" scope="col">
              visit
            </th>
            <th className="r max-md:hidden" scope="col">
              length
            </th>
            <th className="r max-md:hidden" scope="col">
              size
            </th>
            <th className="max-md:hidden" scope="col">
              taken in by
            </th>
          </tr>
        </thead>
        <tbody>
          {recordings.map((one) => (
            <tr key={one.recordingId}>
              <th scope="row">
                <Link className="link num" to={`/recordings/${one.recordingId}`}>
                  {one.fileName}
                </Link>
                {one.refusal ? (
                  <span className="unit block whitespace-normal">{one.refusal}</span>
                ) : null}
              </th>
              <td className="num max-md:hidden">{one.participantCode}</td>
              <td>{one.conditionName}</td>
              {severalPostures ? <td>{one.postureName}</td> : null}
              <td className="whitespace-nowrap">
                <RecordingState recording={one} />
              </td>
              <td className="r num max-md:hidden">{one.day}</td>
              <td className="r num max-md:hidden">
                {one.facts ? `${formatDigits(one.facts.durationS, 3)} s` : "–"}
              </td>
              <td className="r num max-md:hidden">{formatBytes(one.sizeBytes)}</td>
              <td className="whitespace-nowrap max-md:hidden">
                {one.takenInByName}, <span className="num">{formatDay(one.takenInAt)}</span>
              </td>
            </tr>
          ))}
        </tbody>
      </table>
    </div>
  );
}

function RecordingState({ recording }: { recording: Row }) {
  switch (recording.shownState) {
    case "verifying":
      return <span className="text-ink-2">being checked</span>;
    case "refused":
      return <span className="font-semibold">refused</span>;
    default:
      return (
        <>
          <StateMark state={recording.shownState} word />
          {recording.fit && recording.fit.verification !== "verified" ? (
            <span className="unit">
              {recording.fit.verification === "differs" ? " server differs" : " unverified"}
            </span>
          ) : null}
        </>
      );
  }
}

export function ErrorBoundary() {
  return <ErrorScreen />;
}
