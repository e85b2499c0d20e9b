import { Link } from "react-router";
import { deskContext } from "#app/auth/context.server.ts";
import { requireActor } from "#app/auth/require.server.ts";
import { ParticipantFigure } from "#app/charts/participant-figure.tsx";
import { ButtonLink } from "#app/components/button.tsx";
import { Empty } from "#app/components/empty.tsx";
import { ErrorScreen } from "#app/components/error-screen.tsx";
import { FlagNote } from "#app/components/flag.tsx";
import { PageHead } from "#app/components/page-head.tsx";
import { ProgressGrid } from "#app/components/progress-grid.tsx";
import { BarSelect, SelectBar } from "#app/components/select-bar.tsx";
import { StateKey } from "#app/components/state-mark.tsx";
import { ValueGrid } from "#app/components/value-grid.tsx";
import { listParticipants } from "#app/db/participants.server.ts";
import { findLatestProtocol } from "#app/db/protocols.server.ts";
import { listRecordings } from "#app/db/recordings.server.ts";
import { findStudyPlan, type StudyPlan } from "#app/db/studies.server.ts";
import { type CellRecording, cellsOf, recordingState } from "#app/domain/cell.ts";
import {
  countOf,
  formatDay,
  formatNumber,
  halfWidth,
  scaleOf,
  supportedDecimals,
  TERM_NAMES,
} from "#app/domain/quantity.ts";
import { notFound } from "#app/domain/refusal.ts";
import { may } from "#app/domain/role.ts";
import { type Interval, TERMS } from "#app/engine/types.ts";
import { participantValues } from "#app/workflows/study-values.server.ts";
import {
  type ValueCell,
  valueTable,
  type WantedValues,
} from "#app/workflows/value-table.server.ts";
import type { Route } from "./+types/study.ts";

export function meta({ loaderData }: Route.MetaArgs): Route.MetaDescriptors {
  return [{ title: loaderData ? `${loaderData.plan.name} · Ogee` : "Ogee" }];
}

export async function loader({ request, context, params }: Route.LoaderArgs) {
  const { actor, lab } = await requireActor(request, context);
  const desk = context.get(deskContext);
  const { db } = desk.store;
  const plan = await findStudyPlan(db, lab.id, params.id);
  if (!plan) throw notFound();
  const [participants, recordings, latest, values] = await Promise.all([
    listParticipants(db, plan.id),
    listRecordings(db, lab.id, plan.id),
    findLatestProtocol(db, plan.id),
    participantValues(desk, actor, plan.id),
  ]);
  const wanted = wantedValues(plan, new URL(request.url).searchParams);
  const ready: CellRecording[] = recordings
    .filter((one) => one.state === "ready")
    .map((one) => ({
      recordingId: one.recordingId,
      participantId: one.participantId,
      conditionId: one.conditionId,
      postureId: one.postureId,
      axes: one.axes,
      state: recordingState(one.fit?.state ?? null),
    }));
  return {
    plan,
    participants: participants.map(({ id, code }) => ({ id, code })),
    cells: cellsOf(ready),
    recordings: ready.length,
    refused: recordings.filter((one) => one.state === "refused").length,
    protocol: latest && { number: latest.number, at: latest.createdAt },
    wanted,
    table:
      values.length > 0 && wanted
        ? valueTable(values, participants, plan.conditions, wanted)
        : null,
    mayTakeIn: may(actor, "take_in"),
    maySetUp: may(actor, "set_up_study"),
  };
}

/** What the address asks for, or the first of each; null while the study has no axis or posture. */
function wantedValues(plan: StudyPlan, asked: URLSearchParams): WantedValues | null {
  const axis = plan.axes.find((one) => one.name === asked.get("axis")) ?? plan.axes[0];
  const posture = plan.postures.find((one) => one.id === asked.get("posture")) ?? plan.postures[0];
  if (!axis || !posture) return null;
  return {
    axis: axis.name,
    // Another axis' direction is the same side of this one.
    direction: asked.get("side") === "negative" ? axis.negative : axis.positive,
    term: TERMS.find((term) => term === asked.get("term")) ?? "K",
    postureId: posture.id,
    approvedOnly: asked.get("fits") === "approved",
  };
}

type Data = Route.ComponentProps["loaderData"];

export default function Study({ loaderData }: Route.ComponentProps) {
  const { plan, participants, cells, protocol, mayTakeIn, maySetUp } = loaderData;
  const base = `/studies/${plan.id}`;
  const isReady = participants.length > 0 && plan.conditions.length > 0 && plan.axes.length > 0;
  return (
    <>
      <PageHead
        actions={
          isReady && mayTakeIn ? (
            <ButtonLink look="do" to={`${base}/take-in`}>
              Take in recordings
            </ButtonLink>
          ) : null
        }
        facts={[
          countOf(participants.length, "participant"),
          countOf(plan.conditions.length, "condition"),
          plan.postures.map((posture) => posture.name).join(", "),
          plan.rig?.name,
          protocol
            ? `protocol ${protocol.number}, stated ${formatDay(protocol.at)}`
            : "no protocol yet",
        ].filter(Boolean)}
        title={plan.name}
      />
      {plan.origin ? <p className="-mt-3 mb-4 text-sm text-ink-2">{plan.origin}</p> : null}
      {loaderData.refused > 0 ? (
        <FlagNote
          text={`${countOf(loaderData.refused, "file was", "files were")} refused.`}
          todo="What is refused stands in no cell."
        >
          <Link className="link" to={`${base}/recordings?state=refused`}>
            See why
          </Link>
        </FlagNote>
      ) : null}
      {isReady ? (
        <>
          <h2 className="sr-only">Progress</h2>
          <ProgressGrid
            axes={plan.axes}
            cells={cells}
            conditions={plan.conditions}
            listHref={(participantId, conditionId) =>
              `${base}/recordings?participant=${participantId}&condition=${conditionId}`
            }
            participants={participants}
          />
          <div className="mt-2 mb-8">
            <StateKey />
          </div>
          <Values shown={loaderData} />
        </>
      ) : (
        <Empty
          text={
            maySetUp
              ? "Participants × conditions will stand here, each cell in its state. The first step is to add participants and conditions."
              : "Participants × conditions will stand here, once a biomechanist or a manager has added them."
          }
        >
          {maySetUp ? (
            <ButtonLink look="do" to={`${base}/set-up`}>
              Add participants
            </ButtonLink>
          ) : null}
        </Empty>
      )}
    </>
  );
}

function Values({ shown }: { shown: Data }) {
  const { plan, table, wanted, participants } = shown;
  if (!wanted || !table) {
    return (
      <section aria-labelledby="values">
        <h2 id="values">Values</h2>
        <Empty text="Each participant’s K, B and I under each condition will stand here, with their mean and its interval, as soon as a fit is saved." />
      </section>
    );
  }
  const scale = scaleOf(
    wanted.term,
    table.rows.flatMap((row) => row.cells.map((cell) => cell?.mean ?? null)),
  );
  const title = `${capital(TERM_NAMES[wanted.term])} ${wanted.term} towards ${wanted.direction}`;
  const withValue = table.rows.filter((row) => row.cells.some((cell) => cell !== null)).length;
  const baseline = plan.conditions.find((condition) => condition.isBaseline);
  const inWords = (mean: number | null, interval: Interval | null) => {
    const half = halfWidth(interval);
    const [value, width] = [mean, half].map((one) => (one === null ? null : one * scale.factor));
    const decimals = supportedDecimals(value ?? null, width ?? null);
    const range = width === null ? "" : ` ± ${formatNumber(width, decimals)}`;
    return `${formatNumber(value, decimals)}${range} ${scale.unit}`;
  };
  const inUnit = (value: number) => value * scale.factor;

  return (
    <section aria-labelledby="values">
      <h2 id="values">
        {title}, <span className="unit font-mono">{scale.unit}</span>{" "}
        <span className="unit whitespace-normal">
          {wanted.approvedOnly ? "approved fits" : "all current fits"}, {withValue} of{" "}
          {countOf(participants.length, "participant")}
        </span>
      </h2>
      <Choices shown={shown} wanted={wanted} />
      {table.protocolNumbers.length > 1 ? (
        <FlagNote
          text={`These values rest on versions ${table.protocolNumbers.join(" and ")} of the protocol.`}
          todo="Values of different choices are not the same quantity: fit again with one version before you compare."
        />
      ) : null}
      <div className="grid items-start gap-x-8 gap-y-4 xl:grid-cols-[minmax(20rem,1fr)_auto]">
        <div className="min-w-0">
          <ParticipantFigure
            conditions={plan.conditions}
            means={table.means.map((mean, place) => ({
              mean: mean.n < 2 || mean.mean === null ? null : inUnit(mean.mean),
              interval: mean.interval && [inUnit(mean.interval[0]), inUnit(mean.interval[1])],
              label: `Mean, ${plan.conditions[place]?.name}: ${inWords(mean.mean, mean.interval)}, ${countOf(mean.n, "participant")}`,
            }))}
            participants={table.rows.map((row) => ({
              code: row.code,
              values: row.cells.map((cell, place) => ({
                value: cell && inUnit(cell.mean),
                provisional: cell !== null && isProvisional(cell),
                label: cell
                  ? `${row.code}, ${plan.conditions[place]?.name}: ${inWords(cell.mean, cell.t)}, ${cell.state}`
                  : "",
              })),
            }))}
            title={`${title} by condition: participants as lines, means with intervals. The table beside it holds the numbers.`}
          />
          <p className="max-w-prose text-sm text-ink-2">
            Circles: mean over participants with its 95 % interval, Student’s t over participants.
            Lines: participants, each the mean over their included windows; broken and open where a
            fit is not approved or not verified.
          </p>
        </div>
        <div className="min-w-0">
          <ValueGrid
            baselineName={baseline?.name ?? null}
            caption={`${title}, ${scale.unit}`}
            changes={table.changes}
            conditions={plan.conditions}
            means={table.means}
            rows={table.rows}
            scale={scale}
          />
          <p className="mt-1 max-w-prose text-sm text-ink-2">
            Behind ± half the{" "}
            {table.level === null ? "" : `${formatNumber(table.level * 100, 0)} % `}
            interval, Student’s t over windows in a participant’s row and over participants (95 %)
            below.{baseline ? ` Change: from ${baseline.name}, in participants with both.` : null}{" "}
            {table.unapproved > 0
              ? `${table.unapproved} of ${table.shown} values are not approved. `
              : null}
            {table.leftOut.join(" ")}
          </p>
        </div>
      </div>
    </section>
  );
}

function isProvisional(cell: ValueCell): boolean {
  return cell.state !== "approved" || !cell.isVerified;
}

function capital(word: string): string {
  return word.charAt(0).toUpperCase() + word.slice(1);
}

function Choices({ shown: { plan }, wanted }: { shown: Data; wanted: WantedValues }) {
  const axis = plan.axes.find((one) => one.name === wanted.axis);
  return (
    <div className="mt-2">
      <SelectBar label="Which values are shown">
        <BarSelect
          label="axis"
          name="axis"
          options={plan.axes.map((one) => ({ value: one.name, label: one.label }))}
          value={wanted.axis}
        />
        <BarSelect
          label="towards"
          name="side"
          options={[
            { value: "positive", label: axis?.positive ?? "" },
            { value: "negative", label: axis?.negative ?? "" },
          ]}
          value={wanted.direction === axis?.negative ? "negative" : "positive"}
        />
        <BarSelect
          label="term"
          name="term"
          options={TERMS.map((term) => ({ value: term, label: `${term} ${TERM_NAMES[term]}` }))}
          value={wanted.term}
        />
        {plan.postures.length > 1 ? (
          <BarSelect
            label="posture"
            name="posture"
            options={plan.postures.map((one) => ({ value: one.id, label: one.name }))}
            value={wanted.postureId}
          />
        ) : null}
        <BarSelect
          label="fits"
          name="fits"
          options={[
            { value: "all", label: "all current" },
            { value: "approved", label: "approved only" },
          ]}
          value={wanted.approvedOnly ? "approved" : "all"}
        />
      </SelectBar>
    </div>
  );
}

export function ErrorBoundary() {
  return <ErrorScreen />;
}
