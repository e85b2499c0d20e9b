import { useCallback, useEffect, useMemo, useState } from "react";
import {
  data,
  isRouteErrorResponse,
  Link,
  useFetcher,
  useRevalidator,
  useSubmit,
} from "react-router";
import { z } from "zod";
import { deskContext } from "#app/auth/context.server.ts";
import { requireActor } from "#app/auth/require.server.ts";
import { Button, ButtonLink } from "#app/components/button.tsx";
import { ErrorScreen } from "#app/components/error-screen.tsx";
import { SelectField } from "#app/components/field.tsx";
import { Notice } from "#app/components/notice.tsx";
import { AxisSwitch } from "#app/components/recording/axis-switch.tsx";
import { CannotOpen, Opening } from "#app/components/recording/opening.tsx";
import { RecordingHead } from "#app/components/recording/recording-head.tsx";
import { type EditBase, editsKey, useEdits } from "#app/components/recording/use-edits.ts";
import { spanInWords } from "#app/components/recording/words.ts";
import { Workbench } from "#app/components/recording/workbench.tsx";
import { StateMark } from "#app/components/state-mark.tsx";
import { getRecordingForPerson } from "#app/db/fits.server.ts";
import { findProtocol } from "#app/db/protocols.server.ts";
import { parseProtocol } from "#app/domain/protocol.ts";
import { countOf, formatMoment } from "#app/domain/quantity.ts";
import { may } from "#app/domain/role.ts";
import { applyTrimToAll, foundWindows } from "#app/domain/window.ts";
import type { RecordingSource } from "#app/workers/engine.api.ts";
import { type EngineProblem, problemOf, useEngine } from "#app/workers/use-engine.ts";
import { noteRecordingOpened } from "#app/workflows/note-opening.server.ts";
import { compileFor, storeFit, storeFitSchema } from "#app/workflows/store-fit.server.ts";
import { submitFit } from "#app/workflows/submit-fit.server.ts";
import type { Route } from "./+types/recording.ts";

/** The traces take the whole middle of the page. */
export const handle = { full: true };

export function meta({ loaderData }: Route.MetaArgs): Route.MetaDescriptors {
  return [{ title: `${loaderData ? titleOf(loaderData) : "Recording"} · Ogee` }];
}

export async function loader({ request, context, params }: Route.LoaderArgs) {
  const { actor, person } = await requireActor(request, context);
  const desk = context.get(deskContext);
  const { db } = desk.store;
  const all = await getRecordingForPerson(db, actor.labId, params.id);
  await noteRecordingOpened(desk, actor, params.id);
  const { recording, current } = all;
  const asked = new URL(request.url).searchParams.get("protocol");
  const protocolId =
    [asked, current?.protocolId, all.protocols[0]?.id].find((id) =>
      all.protocols.some((version) => version.id === id),
    ) ?? null;
  const version = protocolId === null ? null : await findProtocol(db, protocolId);
  return {
    readAt: desk.clock.now(),
    personId: person.id,
    may: { fit: may(actor, "fit"), submit: may(actor, "submit") },
    recording: {
      id: recording.id,
      fileName: recording.fileName,
      sizeBytes: recording.sizeBytes,
      sha256: recording.sha256,
      state: recording.state,
      refusal: recording.refusal,
    },
    study: all.study,
    participant: all.participant.code,
    condition: all.condition.name,
    posture: all.posture.name,
    day: all.visit.day,
    axes: recording.map.axes.map(
      ({ name }) =>
        all.axes.find((axis) => axis.name === name) ?? {
          name,
          label: name,
          positive: "positive",
          negative: "negative",
        },
    ),
    protocols: all.protocols.map(({ id, number, note }) => ({ id, number, note })),
    protocolId,
    protocol: version === null ? null : compileFor(all, version),
    current: current && {
      id: current.id,
      number: current.number,
      state: current.state,
      version: current.version,
      verification: current.verification,
      verificationNote: current.verificationNote,
      protocolSha256: current.protocolSha256,
      savedByName: current.savedByName,
      savedAt: current.savedAt,
      pooled: current.result.pooled,
      windows: current.windows.map(
        ({ axis, onset_s, window_ms, included, reason, origin, editedById }) => ({
          axis,
          onset_s,
          window_ms,
          included,
          reason,
          origin,
          edited: editedById !== null,
        }),
      ),
    },
  };
}

const actionSchema = z.discriminatedUnion("intent", [
  storeFitSchema.extend({ intent: z.literal("save") }),
  z.strictObject({ intent: z.literal("submit"), fitId: z.string(), version: z.int() }),
]);

export async function action({ request, context, params }: Route.ActionArgs) {
  const { actor } = await requireActor(request, context, "fit");
  const desk = context.get(deskContext);
  const sent = actionSchema.safeParse(await request.json().catch(() => null));
  if (!sent.success) {
    return data(
      { status: "refused" as const, sentence: "What was sent is not a fit: load the page again." },
      { status: 400 },
    );
  }
  if (sent.data.intent === "submit") {
    const { fitId, version } = sent.data;
    return await submitFit(desk, actor, { recordingId: params.id, fitId, version });
  }
  const { intent: _, ...fit } = sent.data;
  return await storeFit(desk, actor, { recordingId: params.id, ...fit });
}

/** A lost connection is an answer like another: the page and its edits stay. */
export async function clientAction({ serverAction }: Route.ClientActionArgs) {
  try {
    return await serverAction();
  } catch (error) {
    if (isConnectionLost(error)) return { status: "offline" as const };
    throw error;
  }
}

type Shown = Awaited<ReturnType<typeof loader>>;

let lastRead: Shown | null = null;

/** Looks again after saving; without a connection the page goes on with what it has. */
export async function clientLoader({
  serverLoader,
  params,
}: Route.ClientLoaderArgs): Promise<Shown> {
  try {
    return await serverLoader();
  } catch (error) {
    if (isConnectionLost(error) && lastRead?.recording.id === params.id) return lastRead;
    throw error;
  }
}

function isConnectionLost(error: unknown): boolean {
  return error instanceof TypeError || (isRouteErrorResponse(error) && error.status >= 502);
}

const LOOK_AGAIN_MS = 1000;

/** The loader's data, looked up again each second for as long as the server is at work. */
function useFresh(loaded: Shown) {
  const again = useFetcher<typeof clientLoader>();
  const { load } = again;
  const newer = again.data && again.data.readAt > loaded.readAt ? again.data : loaded;
  const shown = newer.recording.id === loaded.recording.id ? newer : loaded;
  useEffect(() => {
    lastRead = shown;
  }, [shown]);
  const isWaiting =
    shown.recording.state === "verifying" || shown.current?.verification === "unverified";
  const address = `/recordings/${loaded.recording.id}${
    loaded.protocolId === null ? "" : `?protocol=${loaded.protocolId}`
  }`;
  const look = useCallback(() => load(address), [load, address]);
  useEffect(() => {
    if (!isWaiting) return;
    const timer = setInterval(look, LOOK_AGAIN_MS);
    return () => clearInterval(timer);
  }, [isWaiting, look]);
  return { shown, look };
}

export default function RecordingPage({ loaderData }: Route.ComponentProps) {
  const { shown, look } = useFresh(loaderData);
  const { recording, protocol: compiled, current } = shown;
  const protocol = useMemo(
    () => (compiled?.status === "compiled" ? parseProtocol(compiled.text) : null),
    [compiled],
  );
  const source = useMemo<RecordingSource | null>(
    () =>
      recording.state === "ready" && protocol !== null && compiled?.status === "compiled"
        ? {
            url: `/recordings/${recording.id}/raw`,
            fileName: recording.fileName,
            sizeBytes: recording.sizeBytes,
            sha256: recording.sha256,
            protocol,
            protocolSha256: compiled.sha256,
          }
        : null,
    [recording, protocol, compiled],
  );
  const engine = useEngine(source);
  const [problem, setProblem] = useState<EngineProblem | null>(null);
  const onProblem = useCallback((error: unknown) => {
    const next = problemOf(error);
    if (next.code !== "closed") setProblem(next);
  }, []);

  const opened = engine.status === "ready" ? engine.opened : null;
  const found = opened?.found;
  const currentFit = useStable(current, (fit) => `${fit?.id}`);
  const base = useMemo<EditBase | null>(
    () =>
      found === undefined || protocol === null
        ? null
        : {
            recordingSha256: recording.sha256,
            baseFitId: currentFit?.id ?? null,
            axes: protocol.axes.map(({ name }) => name),
            windows: currentFit?.windows ?? foundWindows(found),
          },
    [found, protocol, recording.sha256, currentFit],
  );
  const edits = useEdits(editsKey(shown.personId, recording.id), base);
  const windows = edits.list?.windows ?? null;
  const [axis, setAxis] = useState<string | null>(null);
  const shownAxis = axis ?? shown.axes[0]?.name ?? "";

  const saving = useSaving(edits, look);
  const isNewProtocol =
    current !== null &&
    compiled?.status === "compiled" &&
    compiled.sha256 !== current.protocolSha256;
  const canSave = edits.unsaved > 0 || current === null || isNewProtocol;

  const head = (
    <Head
      axis={shownAxis}
      onAxis={setAxis}
      shown={shown}
      unsaved={edits.unsaved}
      windowCount={windows?.length ?? 0}
    >
      {shown.may.submit && current !== null ? (
        <SubmitButton canSave={canSave} current={current} onDone={look} />
      ) : null}
    </Head>
  );

  if (engine.status === "ready" && opened !== null && protocol !== null && windows !== null) {
    return (
      <Workbench
        axis={shownAxis}
        canEdit={shown.may.fit}
        canSave={canSave}
        edits={edits}
        head={
          <>
            {head}
            <Notices
              edits={edits}
              onRetry={() => {
                setProblem(null);
                engine.retry();
              }}
              problem={problem}
              saving={saving}
            />
            {isNewProtocol && shown.may.fit ? (
              <OtherProtocol
                edits={edits}
                number={shown.protocols.find(({ id }) => id === shown.protocolId)?.number ?? 0}
                windowMs={protocol.window_ms}
                windows={windows}
              />
            ) : null}
          </>
        }
        foot={
          shown.study.origin ? (
            <p className="mt-6 text-sm text-ink-2">{shown.study.origin}</p>
          ) : null
        }
        isSaving={saving.isBusy}
        key={engine.source.protocolSha256}
        onAxis={setAxis}
        onProblem={onProblem}
        onSave={(saved, result) =>
          saving.save(
            {
              protocolId: shown.protocolId ?? "",
              basedOnFitId: edits.list?.baseFitId ?? null,
              windows: [...saved],
              result,
            },
            saved,
          )
        }
        opened={opened}
        port={engine.engine}
        protocol={protocol}
        recordingSha256={recording.sha256}
        theirs={
          edits.theirs !== null && current !== null
            ? {
                title: `Fit ${current.number}, saved`,
                words: `By ${current.savedByName}, ${formatMoment(current.savedAt)}.`,
                windows: current.windows,
                pooled: current.pooled,
              }
            : null
        }
        windows={windows}
      />
    );
  }
  return (
    <div className="px-5 pt-4 pb-6">
      {head}
      <NotOpen shown={shown}>
        {engine.status === "failed" ? (
          <CannotOpen onRetry={engine.retry} problem={engine.problem}>
            {engine.problem.code === "signed_out" ? (
              <ButtonLink reloadDocument to={`/recordings/${recording.id}`}>
                Sign in
              </ButtonLink>
            ) : null}
          </CannotOpen>
        ) : (
          <Opening
            fileName={recording.fileName}
            progress={engine.status === "opening" ? engine.progress : null}
          />
        )}
      </NotOpen>
    </div>
  );
}

function titleOf({ participant, condition, posture }: Shown): string {
  return `${participant}, ${condition}, ${posture}`;
}

/** Keeps an object for as long as it says the same. */
function useStable<T>(value: T, keyOf: (value: T) => string): T {
  const [held, setHeld] = useState(value);
  if (held !== value && keyOf(held) !== keyOf(value)) {
    setHeld(value);
    return value;
  }
  return held;
}

interface Saving {
  isBusy: boolean;
  /** What the server said, or that it could not be reached. */
  said: string | null;
  canRetry: boolean;
  retry: () => void;
  save: (
    fit: z.input<typeof storeFitSchema>,
    windows: Parameters<ReturnType<typeof useEdits>["saved"]>[1],
  ) => void;
}

function useSaving(edits: ReturnType<typeof useEdits>, look: () => void): Saving {
  const fetcher = useFetcher<typeof clientAction>();
  const { revalidate } = useRevalidator();
  const [sent, setSent] = useState<Parameters<Saving["save"]> | null>(null);
  const [said, setSaid] = useState<string | null>(null);
  const { saved, theirs } = edits;
  const isToChoose = theirs !== null;
  const answer = fetcher.state === "idle" ? fetcher.data : undefined;

  // biome-ignore lint/correctness/useExhaustiveDependencies: each answer is taken up once.
  useEffect(() => {
    if (answer === undefined || sent === null) return;
    if (answer.status === "saved") {
      saved(answer.fitId, sent[1]);
      setSent(null);
      setSaid(null);
      look();
      revalidate();
    } else if (answer.status === "offline") {
      setSaid(
        "The windows could not be sent: there is no connection. They are kept on this computer and not saved.",
      );
    } else {
      setSaid("sentence" in answer ? answer.sentence : null);
      setSent(null);
      look();
    }
  }, [answer]);

  // What the server said of two states is settled when one of them was chosen.
  useEffect(() => {
    if (isToChoose) return () => setSaid(null);
  }, [isToChoose]);

  const save: Saving["save"] = (fit, windows) => {
    setSent([fit, windows]);
    setSaid(null);
    // The result is JSON already: numbers, texts, null.
    void fetcher.submit(JSON.parse(JSON.stringify({ intent: "save", ...fit })), {
      method: "post",
      encType: "application/json",
      defaultShouldRevalidate: false,
    });
  };
  return {
    isBusy: fetcher.state !== "idle",
    said,
    canRetry: sent !== null && answer?.status === "offline",
    retry: () => sent !== null && save(...sent),
    save,
  };
}

function Head({
  shown,
  axis,
  onAxis,
  unsaved,
  windowCount,
  children,
}: {
  shown: Shown;
  axis: string;
  onAxis: (axis: string) => void;
  unsaved: number;
  windowCount: number;
  children: React.ReactNode;
}) {
  const { recording, current, axes, protocols, protocolId } = shown;
  const submit = useSubmit();
  const state = current?.state ?? (windowCount > 0 ? "windowed" : "recorded");
  return (
    <RecordingHead
      actions={
        <>
          {protocols.length > 1 ? (
            <SelectField
              label="Protocol version"
              labelHidden
              onChange={(event) => submit({ protocol: event.target.value }, { replace: true })}
              options={protocols.map(({ id, number }) => ({
                value: id,
                label: `Protocol, version ${number}`,
              }))}
              value={protocolId ?? ""}
            />
          ) : null}
          {current ? (
            <ButtonLink to={`/fits/${current.id}`}>Fit {current.number}</ButtonLink>
          ) : null}
          {children}
        </>
      }
      facts={[
        <AxisSwitch axes={axes} axis={axis} key="axis" onAxis={onAxis} />,
        <a
          className="num hover:underline"
          download
          href={`/recordings/${recording.id}/raw?download=1`}
          key="file"
        >
          {recording.fileName}
        </a>,
        formatDayOfVisit(shown.day),
        <span className="flex items-center" key="state">
          <StateMark state={state} word />
          {unsaved > 0 ? `, ${countOf(unsaved, "edit")} not saved` : null}
        </span>,
        ...(current?.verification === "unverified"
          ? [
              <span
                key="unverified"
                title="The server is computing this fit a second time; it may be submitted when both agree"
              >
                unverified
              </span>,
            ]
          : []),
        ...(current?.verification === "differs"
          ? [
              <span key="differs" title={current.verificationNote ?? undefined}>
                the server’s numbers differ
              </span>,
            ]
          : []),
      ]}
      title={titleOf(shown)}
    />
  );
}

function formatDayOfVisit(day: string): string {
  const [year, month, date] = day.split("-").map(Number);
  return new Date(Date.UTC(year ?? 0, (month ?? 1) - 1, date ?? 1)).toLocaleDateString("en-GB", {
    day: "numeric",
    month: "short",
    year: "numeric",
    timeZone: "UTC",
  });
}

function SubmitButton({
  current,
  canSave,
  onDone,
}: {
  current: NonNullable<Shown["current"]>;
  canSave: boolean;
  onDone: () => void;
}) {
  const fetcher = useFetcher<typeof clientAction>();
  const { revalidate } = useRevalidator();
  const answer = fetcher.state === "idle" ? fetcher.data : undefined;
  // biome-ignore lint/correctness/useExhaustiveDependencies: each answer is taken up once.
  useEffect(() => {
    if (answer === undefined || answer.status === "offline") return;
    onDone();
    revalidate();
  }, [answer]);
  if (current.state !== "draft" && current.state !== "returned") return null;
  const whyNot = canSave
    ? "Save first: a fit is submitted as it is saved"
    : current.verification === "verified"
      ? null
      : current.verification === "differs"
        ? "The server computed other numbers: save again"
        : "The server is still computing this fit a second time";
  const said =
    answer?.status === "offline"
      ? "Not sent: no connection. Try again."
      : answer && "sentence" in answer
        ? answer.sentence
        : null;
  return (
    <>
      <Button
        busy={fetcher.state !== "idle"}
        busyLabel="Submitting"
        disabled={whyNot !== null}
        onClick={() =>
          void fetcher.submit(
            { intent: "submit", fitId: current.id, version: current.version },
            { method: "post", encType: "application/json", defaultShouldRevalidate: false },
          )
        }
        title={whyNot ?? undefined}
        type="button"
      >
        Submit for review
      </Button>
      {said ? (
        <span className="text-sm" role="status">
          {said}
        </span>
      ) : null}
    </>
  );
}

function Notices({
  edits,
  saving,
  problem,
  onRetry,
}: {
  edits: ReturnType<typeof useEdits>;
  saving: Saving;
  problem: EngineProblem | null;
  onRetry: () => void;
}) {
  return (
    <>
      {problem ? (
        <Notice urgent>
          {problem.text}{" "}
          <Button className="ml-2" onClick={onRetry} type="button">
            Start the engine again
          </Button>
        </Notice>
      ) : null}
      {saving.said ? (
        <Notice urgent>
          {saving.said}{" "}
          {saving.canRetry ? (
            <Button busy={saving.isBusy} className="ml-2" onClick={saving.retry} type="button">
              Send them again
            </Button>
          ) : null}
        </Notice>
      ) : null}
      {edits.restored > 0 ? (
        <Notice>
          {countOf(edits.restored, "edit")} of yours came back: kept on this computer, not saved.
        </Notice>
      ) : null}
      {edits.kept ? null : (
        <Notice urgent>
          This browser keeps nothing between visits: save before you leave the page.
        </Notice>
      )}
      {edits.left ? (
        <Notice>
          You went on with the other fit; your own edits are still here.{" "}
          <Button className="ml-2" onClick={edits.bringBack} type="button">
            Bring mine back
          </Button>
        </Notice>
      ) : null}
    </>
  );
}

/** Windows stay as they are under another version; its own window is offered. */
function OtherProtocol({
  number,
  windowMs,
  windows,
  edits,
}: {
  number: number;
  windowMs: readonly [number, number];
  windows: readonly { axis: string; window_ms: readonly [number, number] }[];
  edits: ReturnType<typeof useEdits>;
}) {
  const others = windows.filter(
    (window) => window.window_ms[0] !== windowMs[0] || window.window_ms[1] !== windowMs[1],
  );
  const axes = [...new Set(windows.map((window) => window.axis))];
  return (
    <Notice>
      Fitted with version {number} of the protocol; saving makes a new fit, and the windows stay as
      they are.{" "}
      {others.length > 0 ? (
        <Button
          className="ml-2"
          onClick={() =>
            edits.change((list) =>
              axes.reduce((held, axis) => applyTrimToAll(held, axis, [...windowMs]), list),
            )
          }
          type="button"
        >
          Use its {spanInWords(windowMs)} for all
        </Button>
      ) : null}
    </Notice>
  );
}

/** Why there is nothing to open, or what is under way. */
function NotOpen({ shown, children }: { shown: Shown; children: React.ReactNode }) {
  const { recording, protocol, study } = shown;
  if (recording.state === "verifying") {
    return (
      <Notice>
        The server is checking the stored copy of{" "}
        <span className="font-mono">{recording.fileName}</span>; this page opens it by itself.
      </Notice>
    );
  }
  if (recording.state === "refused") {
    return (
      <Notice>
        {recording.refusal ?? "The stored copy could not be read."}{" "}
        <Link className="link" to={`/studies/${study.id}/take-in`}>
          Take it in again
        </Link>
      </Notice>
    );
  }
  if (protocol === null) {
    return (
      <Notice>
        The study has no protocol yet.{" "}
        <Link className="link" to={`/studies/${study.id}/protocols`}>
          Make its first version
        </Link>
      </Notice>
    );
  }
  if (protocol.status === "refused") {
    return (
      <Notice>
        {protocol.sentence}{" "}
        <Link className="link" to={`/studies/${study.id}/protocols`}>
          See the study’s protocols
        </Link>
      </Notice>
    );
  }
  return children;
}

export function ErrorBoundary() {
  return (
    <div className="px-5 pt-4">
      <ErrorScreen />
    </div>
  );
}
