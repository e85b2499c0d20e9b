import type { ReactNode } from "react";
import { Link } from "react-router";
import { deskContext } from "#app/auth/context.server.ts";
import { requireActor } from "#app/auth/require.server.ts";
import { ButtonLink } from "#app/components/button.tsx";
import { Cautions } from "#app/components/cautions.tsx";
import { Empty } from "#app/components/empty.tsx";
import { ErrorScreen } from "#app/components/error-screen.tsx";
import { PageHead } from "#app/components/page-head.tsx";
import { StateMark } from "#app/components/state-mark.tsx";
import { StudyTable } from "#app/components/study-table.tsx";
import { listHappenings } from "#app/db/happenings.server.ts";
import { listSubmitted } from "#app/db/reviews.server.ts";
import { listStudies } from "#app/db/studies.server.ts";
import { gatherHappenings, type HappeningLine } from "#app/domain/happening.ts";
import { countOf, formatMoment } from "#app/domain/quantity.ts";
import { may } from "#app/domain/role.ts";
import { listTasks, type Task } from "#app/domain/task.ts";
import type { Route } from "./+types/home.ts";

/** Lines of what happened. */
const LINES = 10;

export function meta(): Route.MetaDescriptors {
  return [{ title: "For you · Ogee" }];
}

export async function loader({ request, context }: Route.LoaderArgs) {
  const { actor, person, lab } = await requireActor(request, context);
  const { db } = context.get(deskContext).store;
  const [studies, submitted, happenings] = await Promise.all([
    listStudies(db, lab.id),
    listSubmitted(db, lab.id, person.id),
    listHappenings(db, lab.id),
  ]);
  const mine = submitted.filter((fit) => fit.whyNot === null);
  const reviewable = new Map(
    studies.map((study) => [study.id, mine.filter((fit) => fit.studyId === study.id).length]),
  );
  return {
    roles: actor.roles,
    labName: lab.name,
    studies,
    tasks: listTasks(actor, studies, reviewable),
    lines: gatherHappenings(happenings, LINES),
    maySetUp: may(actor, "set_up_study"),
  };
}

export default function Home({ loaderData }: Route.ComponentProps) {
  const { studies, tasks, lines, roles, labName, maySetUp } = loaderData;
  return (
    <>
      <PageHead facts={[labName, `you are ${listed(roles)} here`]} title="For you" />
      {studies.length === 0 ? (
        <Empty
          text={
            maySetUp
              ? "What waits for you, the lab’s studies and the last things that happened will stand here. The first step is to set up a study."
              : "What waits for you, the lab’s studies and the last things that happened will stand here, once a biomechanist or a manager has set up a study."
          }
        >
          {maySetUp ? (
            <ButtonLink look="do" to="/studies/new">
              Set up a study
            </ButtonLink>
          ) : null}
        </Empty>
      ) : (
        <>
          <Section id="waits" title="What waits for you">
            {tasks.length === 0 ? (
              <p className="py-1 text-ink-2">Nothing waits for you.</p>
            ) : (
              <ul>
                {tasks.map((task) => (
                  <TaskLine key={task.kind + task.studyId} task={task} />
                ))}
              </ul>
            )}
          </Section>
          <Section id="studies" title="Studies">
            <StudyTable studies={studies} />
          </Section>
          {lines.length > 0 ? (
            <Section id="happened" title="What happened last">
              <ol>
                {lines.map((line) => (
                  <Happened key={line.sequence} line={line} />
                ))}
              </ol>
            </Section>
          ) : null}
        </>
      )}
      <Cautions />
    </>
  );
}

/** "biomechanist, manager and reviewer". */
function listed(words: readonly string[]): string {
  return words.length < 2 ? words.join("") : `${words.slice(0, -1).join(", ")} and ${words.at(-1)}`;
}

function Section({ id, title, children }: { id: string; title: string; children: ReactNode }) {
  return (
    <section aria-labelledby={id} className="mb-8">
      <h2 className="border-b border-ink pb-1" id={id}>
        {title}
      </h2>
      {children}
    </section>
  );
}

function TaskLine({ task }: { task: Task }) {
  const { text, to, mark } = wordsOfTask(task);
  return (
    <li className="grid grid-cols-[20px_1fr] gap-x-3 border-b border-rule py-1 hover:bg-hover">
      <span className="pt-0.5">{mark}</span>
      <span className="flex flex-wrap items-center gap-x-3">
        <Link className="link inline-flex min-h-6 items-center" to={to}>
          {text}
        </Link>
        <span className="text-ink-2">{task.studyName}</span>
      </span>
    </li>
  );
}

function wordsOfTask(task: Task): { text: string; to: string; mark: ReactNode } {
  const study = `/studies/${task.studyId}`;
  const list = (state: string) => `${study}/recordings?state=${state}`;
  const { count } = task;
  switch (task.kind) {
    case "returned":
      return {
        text: `${countOf(count, "fit")} came back from review`,
        to: list("returned"),
        mark: <StateMark silent state="returned" />,
      };
    case "review":
      return {
        text: `${countOf(count, "fit")} to review`,
        to: "/reviews",
        mark: <StateMark silent state="submitted" />,
      };
    case "draft":
      return {
        text: `${countOf(count, "draft")} to submit`,
        to: list("draft"),
        mark: <StateMark silent state="draft" />,
      };
    case "no_fit":
      return {
        text: `${countOf(count, "recording")} without a fit`,
        to: list("recorded"),
        mark: <StateMark silent state="recorded" />,
      };
    case "no_conditions":
      return { text: "No conditions yet", to: `${study}/set-up#conditions`, mark: null };
    case "no_protocol":
      return { text: "No protocol yet", to: `${study}/protocols`, mark: null };
    case "no_participants":
      return { text: "No participants yet", to: `${study}/set-up#participants`, mark: null };
  }
}

function Happened({ line }: { line: HappeningLine }) {
  return (
    <li className="grid grid-cols-1 gap-x-6 border-b border-rule py-1 sm:grid-cols-[13rem_1fr]">
      <span className="num text-ink-2">{formatMoment(line.at)}</span>
      <span>
        {line.personName ?? "The server"} {line.sentence}{" "}
        <Link className="link" to={line.href}>
          {line.about ?? line.study.name}
        </Link>
        {line.about ? <span className="text-ink-2">, {line.study.name}</span> : null}
      </span>
    </li>
  );
}

export function ErrorBoundary() {
  return <ErrorScreen />;
}
