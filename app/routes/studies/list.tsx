import { deskContext } from "#app/auth/context.server.ts";
import { requireActor } from "#app/auth/require.server.ts";
import { ButtonLink } from "#app/components/button.tsx";
import { Empty } from "#app/components/empty.tsx";
import { ErrorScreen } from "#app/components/error-screen.tsx";
import { PageHead } from "#app/components/page-head.tsx";
import { StudyTable } from "#app/components/study-table.tsx";
import { listStudies } from "#app/db/studies.server.ts";
import { countOf } from "#app/domain/quantity.ts";
import { may } from "#app/domain/role.ts";
import type { Route } from "./+types/list.ts";

export function meta(): Route.MetaDescriptors {
  return [{ title: "Studies · Ogee" }];
}

export async function loader({ request, context }: Route.LoaderArgs) {
  const { actor, lab } = await requireActor(request, context);
  const studies = await listStudies(context.get(deskContext).store.db, lab.id);
  return { studies, labName: lab.name, maySetUp: may(actor, "set_up_study") };
}

export default function Studies({ loaderData }: Route.ComponentProps) {
  const { studies, labName, maySetUp } = loaderData;
  if (studies.length === 0) {
    return (
      <>
        <PageHead title="Studies" />
        <Empty
          text={
            maySetUp
              ? `The studies of ${labName} will stand here. The first step is to name one, its axes and its conditions.`
              : `The studies of ${labName} will stand here. A biomechanist or a manager sets up the first one.`
          }
        >
          {maySetUp ? (
            <ButtonLink look="do" to="/studies/new">
              Set up a study
            </ButtonLink>
          ) : null}
        </Empty>
      </>
    );
  }
  return (
    <>
      <PageHead
        actions={maySetUp ? <ButtonLink to="/studies/new">Set up a study</ButtonLink> : null}
        facts={[countOf(studies.length, "study", "studies"), labName]}
        title="Studies"
      />
      <StudyTable studies={studies} />
    </>
  );
}

export function ErrorBoundary() {
  return <ErrorScreen />;
}
