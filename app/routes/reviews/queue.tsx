import { Link } from "react-router";
import { deskContext } from "#app/auth/context.server.ts";
import { requireActor } from "#app/auth/require.server.ts";
import { ButtonLink } from "#app/components/button.tsx";
import { Empty } from "#app/components/empty.tsx";
import { ErrorScreen } from "#app/components/error-screen.tsx";
import { PageHead } from "#app/components/page-head.tsx";
import { listSubmitted, type SubmittedFit } from "#app/db/reviews.server.ts";
import { countOf, formatDay, formatTime } from "#app/domain/quantity.ts";
import { may } from "#app/domain/role.ts";
import type { Route } from "./+types/queue.ts";

export function meta(): Route.MetaDescriptors {
  return [{ title: "Review · Ogee" }];
}

export async function loader({ request, context }: Route.LoaderArgs) {
  const { actor, lab } = await requireActor(request, context);
  const submitted = await listSubmitted(context.get(deskContext).store.db, lab.id, actor.personId);
  return { submitted, mayReview: may(actor, "review") };
}

export default function Queue({ loaderData }: Route.ComponentProps) {
  const { submitted, mayReview } = loaderData;
  const mine = mayReview ? submitted.filter((fit) => fit.whyNot === null) : [];
  const others = submitted.filter((fit) => !mine.includes(fit));
  const [next] = mine;

  if (submitted.length === 0) {
    return (
      <>
        <PageHead title="Review" />
        <Empty text="Fits that are submitted will stand here, the longest waiting first. Nothing waits now." />
      </>
    );
  }
  return (
    <>
      <PageHead
        actions={
          next ? (
            <ButtonLink look="do" to={`/fits/${next.fitId}`}>
              Open the next fit
            </ButtonLink>
          ) : null
        }
        facts={[
          `${countOf(submitted.length, "fit")} submitted`,
          ...(mayReview ? [`${mine.length} for you to decide on`] : []),
        ]}
        title="Review"
      />
      {mine.length > 0 ? (
        <section aria-labelledby="mine" className="mb-8">
          <h2 className="mb-1" id="mine">
            For you to decide on
          </h2>
          <FitTable fits={mine} mayReview />
        </section>
      ) : null}
      {others.length > 0 ? (
        <section aria-labelledby="others">
          <h2 className="mb-1" id="others">
            {mayReview ? "For another reviewer" : "Waiting for a reviewer"}
          </h2>
          <FitTable fits={others} mayReview={mayReview} />
        </section>
      ) : null}
    </>
  );
}

function FitTable({ fits, mayReview }: { fits: SubmittedFit[]; mayReview: boolean }) {
  return (
    <div className="wide">
      <table className="rows">
        <thead>
          <tr>
            <th scope="col">fit of</th>
            <th className="max-md:hidden" scope="col">
              study
            </th>
            <th className="max-md:hidden" scope="col">
              protocol
            </th>
            <th className="max-md:hidden" scope="col">
              saved by
            </th>
            <th scope="col">submitted</th>
            {mayReview ? <th scope="col">residuals</th> : null}
          </tr>
        </thead>
        <tbody>
          {fits.map((fit) => (
            <tr key={fit.fitId}>
              <th className="min-w-40" scope="row">
                <Link className="link" to={`/fits/${fit.fitId}`}>
                  <span className="num">{fit.participantCode}</span>, {fit.conditionName},{" "}
                  {fit.postureName}
                </Link>
                <span className="unit block font-mono">
                  {fit.fileName}
                  {fit.verification === "verified" ? null : (
                    <span className="font-sans">
                      , {fit.verification === "differs" ? "server differs" : "unverified"}
                    </span>
                  )}
                </span>
              </th>
              <td className="max-md:hidden">{fit.studyName}</td>
              <td className="num max-md:hidden">{fit.protocolNumber}</td>
              <td className="max-md:hidden">{fit.savedByName}</td>
              <td className="num">
                {formatDay(fit.submittedAt)}
                <span className="max-md:hidden">, {formatTime(fit.submittedAt)}</span>
              </td>
              {mayReview ? (
                <td className="text-ink-2 md:min-w-40">
                  {fit.whyNot ?? (fit.hasOpenedResiduals ? "opened" : "not opened yet")}
                </td>
              ) : null}
            </tr>
          ))}
        </tbody>
      </table>
    </div>
  );
}

export function ErrorBoundary() {
  return <ErrorScreen />;
}
