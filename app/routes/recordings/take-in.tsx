import { useCallback, useEffect, useMemo, useState } from "react";
import { useBlocker, useRevalidator } from "react-router";
import { deskContext } from "#app/auth/context.server.ts";
import { requireActor } from "#app/auth/require.server.ts";
import { Button, ButtonLink } from "#app/components/button.tsx";
import { Dialog } from "#app/components/dialog.tsx";
import { Empty } from "#app/components/empty.tsx";
import { ErrorScreen } from "#app/components/error-screen.tsx";
import { PageHead } from "#app/components/page-head.tsx";
import { standingOfAll, type TakeInStudy } from "#app/components/take-in/batch.ts";
import { findHeld, httpPort } from "#app/components/take-in/http-port.ts";
import { TakeInPage } from "#app/components/take-in/take-in-page.tsx";
import { type ReadPort, useTakeIn } from "#app/components/take-in/use-take-in.ts";
import { readChoices } from "#app/db/fits.server.ts";
import { listParticipants } from "#app/db/participants.server.ts";
import { findLatestProtocol } from "#app/db/protocols.server.ts";
import { findRig } from "#app/db/rigs.server.ts";
import { findStudyPlan, type StudyPlan } from "#app/db/studies.server.ts";
import { defaultChoices } from "#app/domain/protocol.ts";
import { countOf } from "#app/domain/quantity.ts";
import { notFound } from "#app/domain/refusal.ts";
import { rigMapSchema } from "#app/domain/rig-map.ts";
import { may } from "#app/domain/role.ts";
import type { Route } from "./+types/take-in.ts";

/** The list and its drawer take the whole middle of the page. */
export const handle = { full: true };

const DAY_MS = 24 * 60 * 60 * 1000;

export function meta({ loaderData }: Route.MetaArgs): Route.MetaDescriptors {
  return [{ title: loaderData ? `Take in recordings of ${loaderData.name} · Ogee` : "Ogee" }];
}

export async function loader({ request, context, params }: Route.LoaderArgs) {
  const { actor, lab } = await requireActor(request, context, "take_in");
  const { store, clock } = context.get(deskContext);
  const plan = await findStudyPlan(store.db, lab.id, params.id);
  if (!plan) throw notFound();
  const [participants, rig, protocol] = await Promise.all([
    listParticipants(store.db, plan.id),
    plan.rigId === null ? null : findRig(store.db, lab.id, plan.rigId),
    findLatestProtocol(store.db, plan.id),
  ]);
  return {
    id: plan.id,
    name: plan.name,
    rigName: rig?.name ?? null,
    missing: missingParts(plan, participants.length),
    maySetUp: may(actor, "set_up_study"),
    study: {
      rigMap: rig?.channelMap ? rigMapSchema.parse(JSON.parse(rig.channelMap)) : null,
      axes: plan.axes.map(({ name, label, positive, negative }) => ({
        name,
        label,
        positive,
        negative,
      })),
      conditions: plan.conditions.map(({ id, name }) => ({ id, name })),
      postures: plan.postures.map(({ id, name }) => ({ id, name })),
      participants: participants.map(({ id, code, testedSide }) => ({ id, code, testedSide })),
      choices: protocol ? readChoices(protocol.choices) : defaultChoices,
      fileNamePattern: plan.fileNamePattern,
      // It may be tomorrow already where the person is.
      lastDay: new Date(clock.now() + DAY_MS).toISOString().slice(0, 10),
    } satisfies TakeInStudy,
  };
}

/** What a study lacks before a recording can belong anywhere. */
function missingParts(plan: StudyPlan, participants: number): string[] {
  return [
    ...(plan.rig === null ? ["a rig"] : []),
    ...(plan.axes.length === 0 ? ["an axis"] : []),
    ...(plan.conditions.length === 0 ? ["a condition"] : []),
    ...(plan.postures.length === 0 ? ["a posture"] : []),
    ...(participants === 0 ? ["participants"] : []),
  ];
}

export default function TakeInRoute({ loaderData }: Route.ComponentProps) {
  const { id, name, missing, maySetUp } = loaderData;
  if (missing.length > 0) {
    return (
      <div className="px-5 pt-4 pb-10">
        <PageHead title={`Take in recordings of ${name}`} />
        <Empty
          text={`Recordings will be taken in here once the study has ${inWords(missing)}: a recording belongs to a participant, a condition and a posture, on a rig whose columns are known.`}
        >
          {maySetUp ? (
            <ButtonLink look="do" to={`/studies/${id}/set-up`}>
              Complete the set-up
            </ButtonLink>
          ) : null}
        </Empty>
      </div>
    );
  }
  // Another study starts with an empty list.
  return <TakeInOfStudy key={id} shown={loaderData} />;
}

function inWords(parts: readonly string[]): string {
  return parts.length < 2
    ? (parts[0] ?? "")
    : `${parts.slice(0, -1).join(", ")} and ${parts.at(-1)}`;
}

function TakeInOfStudy({ shown }: { shown: Route.ComponentProps["loaderData"] }) {
  const { id, name, rigName, study } = shown;
  const read = useReader();
  const { revalidate } = useRevalidator();
  const ports = useMemo(
    () => ({
      read,
      send: httpPort(id),
      findHeld: (sha256s: readonly string[]) => findHeld(id, sha256s),
    }),
    [id, read],
  );
  const onDone = useCallback(() => void revalidate(), [revalidate]);
  const takeIn = useTakeIn(study, ports, onDone);
  const { unsent } = standingOfAll(takeIn.batch, study);
  const uploads = countOf(unsent.length, "upload");

  useEffect(() => {
    if (unsent.length === 0) return;
    const warn = (event: BeforeUnloadEvent) => event.preventDefault();
    window.addEventListener("beforeunload", warn);
    return () => window.removeEventListener("beforeunload", warn);
  }, [unsent.length]);
  const blocker = useBlocker(
    ({ currentLocation, nextLocation }) =>
      unsent.length > 0 && currentLocation.pathname !== nextLocation.pathname,
  );

  return (
    <>
      <TakeInPage
        head={
          <PageHead
            facts={[
              ...(rigName ? [rigName] : []),
              ...(takeIn.batch.files.length > 0
                ? [countOf(takeIn.batch.files.length, "file")]
                : []),
            ]}
            title={`Take in recordings of ${name}`}
          />
        }
        recordingsPath={`/studies/${id}/recordings`}
        study={study}
        takeIn={takeIn}
      />
      <Dialog
        actions={
          <Button
            onClick={() => {
              takeIn.stop(unsent);
              blocker.proceed?.();
            }}
            type="button"
          >
            Leave and end {uploads}
          </Button>
        }
        onClose={() => blocker.reset?.()}
        open={blocker.state === "blocked"}
        title="Uploads are under way"
      >
        <p>
          {uploads} not at the end yet. Stay until all is ready, or leave: what has not arrived
          whole is given up, and nothing of it is kept.
        </p>
      </Dialog>
    </>
  );
}

/** The worker that reads files, once this runs in a browser. */
function useReader(): ReadPort | null {
  const [reader, setReader] = useState<ReadPort | null>(null);
  useEffect(() => {
    let close: (() => void) | null = null;
    let isGone = false;
    import("#app/workers/engine.client.ts").then(({ IncomingFiles }) => {
      if (isGone) return;
      const files = new IncomingFiles();
      close = () => files.close();
      setReader(files);
    });
    return () => {
      isGone = true;
      close?.();
    };
  }, []);
  return reader;
}

export function ErrorBoundary() {
  return (
    <div className="px-5 pt-4 pb-10">
      <ErrorScreen />
    </div>
  );
}
