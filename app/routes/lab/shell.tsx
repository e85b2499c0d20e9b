import { Form, Link, Outlet, useLocation, useMatches, useNavigation } from "react-router";
import { deskContext } from "#app/auth/context.server.ts";
import { requireActor } from "#app/auth/require.server.ts";
import { ErrorScreen } from "#app/components/error-screen.tsx";
import { Spine, type SpinePlace, SpinePlaces } from "#app/components/spine.tsx";
import { ThemeSwitch } from "#app/components/theme-switch.tsx";
import { listMemberships } from "#app/db/people.server.ts";
import { listSubmitted } from "#app/db/reviews.server.ts";
import { findStudyIdOf, listStudies } from "#app/db/studies.server.ts";
import { may } from "#app/domain/role.ts";
import { listTasks } from "#app/domain/task.ts";
import { readTheme } from "#app/domain/theme.ts";
import type { Route } from "./+types/shell.ts";

export async function loader({ request, context, params }: Route.LoaderArgs) {
  const { actor, person, lab } = await requireActor(request, context);
  const { db } = context.get(deskContext).store;
  const [memberships, studies, submitted, studyId] = await Promise.all([
    listMemberships(db, person.id),
    listStudies(db, lab.id),
    listSubmitted(db, lab.id, person.id),
    studyOfPlace(new URL(request.url).pathname, params.id, (type, id) =>
      findStudyIdOf(db, lab.id, { type, id }),
    ),
  ]);
  const study = studies.find((one) => one.id === studyId) ?? null;
  const reviewable = new Map<string, number>();
  for (const fit of submitted) {
    if (fit.whyNot === null) reviewable.set(fit.studyId, (reviewable.get(fit.studyId) ?? 0) + 1);
  }
  return {
    person: { name: person.name },
    lab: { name: lab.name },
    hasOtherLabs: memberships.length > 1,
    theme: readTheme(request.headers.get("cookie")),
    study: study && {
      id: study.id,
      name: study.name,
      origin: study.origin,
      recordings: study.recordings,
    },
    tasks: listTasks(actor, studies, reviewable).reduce((sum, task) => sum + task.count, 0),
    submitted: submitted.length,
    may: { takeIn: may(actor, "take_in"), setUp: may(actor, "set_up_study") },
  };
}

/** The study that an address lies in, whether it names the study or something of it. */
async function studyOfPlace(
  pathname: string,
  id: string | undefined,
  find: (type: "recording" | "fit", id: string) => Promise<string | null>,
): Promise<string | null> {
  if (id === undefined) return null;
  if (pathname.startsWith("/studies/")) return id;
  if (pathname.startsWith("/recordings/")) return find("recording", id);
  if (pathname.startsWith("/fits/")) return find("fit", id);
  return null;
}

export default function Shell({ loaderData }: Route.ComponentProps) {
  const { lab, study, person, theme, hasOtherLabs } = loaderData;
  const { pathname, search } = useLocation();
  const isLoading = useNavigation().state === "loading";
  const isFull = useMatches().some((match) => isFullHandle(match.handle));
  const { general, inStudy } = placesOf(loaderData, pathname);

  return (
    <div className="min-h-dvh md:grid md:grid-cols-[176px_minmax(0,1fr)]">
      <Spine
        menuKey={pathname + search}
        where={
          <>
            {lab.name}
            {study ? <span className="md:hidden">, {study.name}</span> : null}
          </>
        }
      >
        <SpinePlaces label="Places of the lab" places={general} />
        {study ? (
          <div className="mt-3 border-t border-rule pt-3">
            <p className="mb-1 mr-2 text-sm text-ink-2">{study.name}</p>
            <SpinePlaces label={`Places of ${study.name}`} places={inStudy} />
          </div>
        ) : null}
        <div className="mt-auto flex flex-col gap-1 pt-6 pr-3 pb-4 text-sm text-ink-2">
          <ThemeSwitch back={pathname + search} theme={theme} />
          <p className="text-ink">{person.name}</p>
          <div className="flex flex-wrap gap-x-3">
            {hasOtherLabs ? (
              <Link className="inline-flex min-h-6 items-center hover:text-ink" to="/choose-lab">
                Other lab
              </Link>
            ) : null}
            <Form action="/sign-out" method="post">
              <button className="min-h-6 hover:text-ink" type="submit">
                Sign out
              </button>
            </Form>
          </div>
        </div>
      </Spine>
      <main
        aria-busy={isLoading}
        className={`min-w-0 ${isFull ? "" : "px-5 pt-4 pb-10"}`}
        id="main"
        tabIndex={-1}
      >
        <p className="sr-only" role="status">
          {isLoading ? "Loading" : ""}
        </p>
        {isLoading ? <div aria-hidden="true" className="loading-line" /> : null}
        <Outlet />
      </main>
    </div>
  );
}

/** A route that exports `handle = { full: true }` gets the whole middle, without its margins. */
function isFullHandle(handle: unknown): boolean {
  return typeof handle === "object" && handle !== null && "full" in handle && handle.full === true;
}

/** Only what there is, and what this person may open. */
function placesOf(
  shown: Route.ComponentProps["loaderData"],
  pathname: string,
): { general: SpinePlace[]; inStudy: SpinePlace[] } {
  const general: SpinePlace[] = [
    {
      to: "/",
      name: "For you",
      current: pathname === "/",
      count: shown.tasks,
      countOf: "things wait for you",
    },
    {
      to: "/studies",
      name: "Studies",
      current: pathname === "/studies" || pathname === "/studies/new",
    },
    {
      to: "/reviews",
      name: "Review",
      current: pathname === "/reviews",
      count: shown.submitted,
      countOf: "fits submitted",
    },
  ];
  if (!shown.study) return { general, inStudy: [] };
  const base = `/studies/${shown.study.id}`;
  const inStudy: SpinePlace[] = [
    { to: base, name: "Progress", current: pathname === base },
    ...(shown.may.takeIn
      ? [{ to: `${base}/take-in`, name: "Take in", current: pathname === `${base}/take-in` }]
      : []),
    {
      to: `${base}/recordings`,
      name: "Recordings",
      current:
        pathname === `${base}/recordings` ||
        pathname.startsWith("/recordings/") ||
        pathname.startsWith("/fits/"),
      count: shown.study.recordings,
    },
    { to: `${base}/protocols`, name: "Protocols", current: pathname === `${base}/protocols` },
    ...(shown.may.setUp
      ? [{ to: `${base}/set-up`, name: "Set-up", current: pathname === `${base}/set-up` }]
      : []),
  ];
  return { general, inStudy };
}

export function ErrorBoundary() {
  return (
    <main className="px-5 pt-4 pb-10" id="main" tabIndex={-1}>
      <ErrorScreen />
    </main>
  );
}
