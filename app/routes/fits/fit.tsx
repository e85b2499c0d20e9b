import { useCallback, useEffect, useMemo, useState } from "react";
import { data, isRouteErrorResponse, Link, useFetcher, useRevalidator } from "react-router";
import { z } from "zod";
import { deskContext } from "#app/auth/context.server.ts";
import { requireActor } from "#app/auth/require.server.ts";
import { TorquePlot } from "#app/charts/torque-plot.tsx";
import { Button, ButtonLink } from "#app/components/button.tsx";
import { ErrorScreen } from "#app/components/error-screen.tsx";
import {
  APPROVE_ID,
  DecisionPanel,
  NOTE_ID,
  RETURN_ID,
} from "#app/components/fit/decision-panel.tsx";
import { FitHistory, VERIFICATION_WORDS } from "#app/components/fit/fit-history.tsx";
import { PlotTable } from "#app/components/fit/plot-table.tsx";
import { PooledBlock } from "#app/components/fit/pooled-block.tsx";
import { Provenance } from "#app/components/fit/provenance.tsx";
import { ResidualSection } from "#app/components/fit/residual-section.tsx";
import { type FitWindowRow, WindowTable } from "#app/components/fit/window-table.tsx";
import { Notice } from "#app/components/notice.tsx";
import { AxisSwitch } from "#app/components/recording/axis-switch.tsx";
import { FlagSummary } from "#app/components/recording/flag-summary.tsx";
import { type KeyLine, KeysDialog } from "#app/components/recording/keys-dialog.tsx";
import { CannotOpen } from "#app/components/recording/opening.tsx";
import { RecordingHead } from "#app/components/recording/recording-head.tsx";
import { ResidualList } from "#app/components/recording/residual-list.tsx";
import { useKeys, useSingleKeys } from "#app/components/recording/use-keys.ts";
import { axisFlags } from "#app/components/recording/words.ts";
import { StateMark } from "#app/components/state-mark.tsx";
import { getFit } from "#app/db/fits.server.ts";
import { findHandsOnRecordings, hasOpenedResiduals } from "#app/db/reviews.server.ts";
import { describeChoices, parseProtocol } from "#app/domain/protocol.ts";
import { countOf, formatMoment, formatNumber } from "#app/domain/quantity.ts";
import { DECISIONS, whyNotReviewer } from "#app/domain/review.ts";
import { may } from "#app/domain/role.ts";
import type { WindowDrawing } from "#app/engine/types.ts";
import type { RecordingSource } from "#app/workers/engine.api.ts";
import { problemOf, useEngine } from "#app/workers/use-engine.ts";
import { noteRecordingOpened } from "#app/workflows/note-opening.server.ts";
import { openResiduals, reviewFit } from "#app/workflows/review-fit.server.ts";
import { submitFit } from "#app/workflows/submit-fit.server.ts";
import type { Route } from "./+types/fit.ts";

export const handle = { full: true };

export function meta({ loaderData }: Route.MetaArgs): Route.MetaDescriptors {
  const title = loaderData ? `Fit ${loaderData.fit.number}, ${titleOf(loaderData)}` : "Fit";
  return [{ title: `${title} · Ogee` }];
}

export async function loader({ request, context, params }: Route.LoaderArgs) {
  const { actor, person } = await requireActor(request, context);
  const desk = context.get(deskContext);
  const { db } = desk.store;
  const all = await getFit(db, actor.labId, params.id);
  await noteRecordingOpened(desk, actor, all.recording.id);
  const mayReview = may(actor, "review");
  const hands = (await findHandsOnRecordings(db, [all.recording.id])).get(all.recording.id);
  return {
    readAt: desk.clock.now(),
    may: { review: mayReview, submit: may(actor, "submit"), fit: may(actor, "fit") },
    whyNot: hands ? whyNotReviewer(person.id, hands) : null,
    hasOpenedResiduals: mayReview && (await hasOpenedResiduals(db, params.id, person.id)),
    recording: {
      id: all.recording.id,
      fileName: all.recording.fileName,
      sizeBytes: all.recording.sizeBytes,
      sha256: all.recording.sha256,
    },
    origin: all.study.origin,
    participant: all.participant.code,
    condition: all.condition.name,
    posture: all.posture.name,
    axes: all.recording.map.axes.map(({ name }) => ({
      name,
      label: all.axes.find((axis) => axis.name === name)?.label ?? name,
    })),
    fit: all.fit,
    protocolDocument: all.protocolDocument,
    protocolInWords: describeChoices(all.protocolChoices, all.fit.result.recordings[0]?.rate_hz),
    reviews: all.reviews,
    history: all.history,
  };
}

const actionSchema = z.discriminatedUnion("intent", [
  z.strictObject({ intent: z.literal("open_residuals") }),
  z.strictObject({ intent: z.literal("submit"), version: z.int() }),
  z.strictObject({
    intent: z.literal("decide"),
    version: z.int(),
    decision: z.enum(DECISIONS),
    note: z.string().max(2000),
  }),
]);

export async function action({ request, context, params }: Route.ActionArgs) {
  const sent = actionSchema.safeParse(await request.json().catch(() => null));
  if (!sent.success) {
    await requireActor(request, context);
    return data(
      { status: "refused" as const, sentence: "That could not be read: load the page again." },
      { status: 400 },
    );
  }
  const desk = context.get(deskContext);
  const fitId = params.id;
  if (sent.data.intent === "submit") {
    const { actor } = await requireActor(request, context, "submit");
    return await submitFit(desk, actor, { fitId, version: sent.data.version });
  }
  const { actor } = await requireActor(request, context, "review");
  if (sent.data.intent === "open_residuals") return await openResiduals(desk, actor, { fitId });
  const { version, decision, note } = sent.data;
  return await reviewFit(desk, actor, { fitId, version, decision, note });
}

/** A lost connection is an answer like another: the page and the note on it stay. */
export async function clientAction({ serverAction }: Route.ClientActionArgs) {
  try {
    return await serverAction();
  } catch (error) {
    if (isConnectionLost(error)) {
      return {
        status: "offline" as const,
        sentence: "Not sent: there is no connection. Try again when there is one.",
      };
    }
    throw error;
  }
}

type Shown = Awaited<ReturnType<typeof loader>>;

let lastRead: Shown | null = null;

export async function clientLoader({
  serverLoader,
  params,
}: Route.ClientLoaderArgs): Promise<Shown> {
  try {
    return await serverLoader();
  } catch (error) {
    if (isConnectionLost(error) && lastRead?.fit.id === params.id) return lastRead;
    throw error;
  }
}

function isConnectionLost(error: unknown): boolean {
  return error instanceof TypeError || (isRouteErrorResponse(error) && error.status >= 502);
}

const LOOK_AGAIN_MS = 1000;
/** Enough that no window is thinned: what is counted here is every sample. */
const EVERY_SAMPLE = 1_000_000;

/** The loader's data, looked up again while the server computes the fit a second time. */
function useFresh(loaded: Shown): Shown {
  const again = useFetcher<typeof clientLoader>();
  const { load } = again;
  const isNewer = again.data?.fit.id === loaded.fit.id && again.data.readAt > loaded.readAt;
  const shown = isNewer && again.data ? again.data : loaded;
  useEffect(() => {
    lastRead = shown;
  }, [shown]);
  const isWaiting = shown.fit.verification === "unverified";
  useEffect(() => {
    if (!isWaiting) return;
    const timer = setInterval(() => load(`/fits/${loaded.fit.id}`), LOOK_AGAIN_MS);
    return () => clearInterval(timer);
  }, [isWaiting, load, loaded.fit.id]);
  return shown;
}

type Drawings =
  | { status: "waiting" }
  | { status: "ready"; drawings: WindowDrawing[]; sampleMs: number }
  | { status: "failed"; problem: { code: string; text: string }; retry: () => void };

/** The windows' lines from the raw file; the numbers beside them are the saved ones. */
function useDrawings({ fit, recording, protocolDocument }: Shown): Drawings {
  const fitId = fit.id;
  // biome-ignore lint/correctness/useExhaustiveDependencies: a saved fit never changes: its id stands for all of it.
  const source = useMemo<RecordingSource>(
    () => ({
      url: `/recordings/${recording.id}/raw`,
      fileName: recording.fileName,
      sizeBytes: recording.sizeBytes,
      sha256: recording.sha256,
      protocol: parseProtocol(protocolDocument),
      protocolSha256: fit.protocolSha256,
    }),
    [fitId],
  );
  const state = useEngine(source);
  const engine = state.status === "ready" ? state.engine : null;
  const [drawn, setDrawn] = useState<{ fitId: string; drawings: WindowDrawing[] } | null>(null);
  const [problem, setProblem] = useState<{ code: string; text: string } | null>(null);
  // biome-ignore lint/correctness/useExhaustiveDependencies: a saved fit never changes: its id stands for all of it.
  useEffect(() => {
    if (engine === null) return;
    setProblem(null);
    engine
      .viewAll({
        choices: fit.windows.map(({ axis, onset_s, window_ms, included, reason }) => ({
          axis,
          onset_s,
          window_ms,
          included,
          reason,
        })),
        pixels: EVERY_SAMPLE,
      })
      .then((drawings) => setDrawn({ fitId, drawings }))
      .catch((error) => {
        const next = problemOf(error);
        if (next.code !== "closed") setProblem(next);
      });
  }, [engine, fitId]);

  if (state.status === "failed") {
    return { status: "failed", problem: state.problem, retry: state.retry };
  }
  if (problem !== null) return { status: "failed", problem, retry: state.retry };
  if (state.status !== "ready" || drawn?.fitId !== fitId) return { status: "waiting" };
  return { status: "ready", drawings: drawn.drawings, sampleMs: 1000 / state.opened.rateHz };
}

export default function FitPage({ loaderData }: Route.ComponentProps) {
  const shown = useFresh(loaderData);
  const { fit, axes } = shown;
  const { result } = fit;
  const drawn = useDrawings(shown);
  const { decide, submit, open, isBusy, said } = useDecision(shown);

  const [axis, setAxis] = useState(axes[0]?.name ?? "");
  const rows = useMemo(() => rowsOf(shown, axis), [shown, axis]);
  const firstIncluded = rows.find(({ window }) => window.included)?.number ?? null;
  const [chosenNumber, setChosenNumber] = useState<number | null>(null);
  const chosen = rows.some((row) => row.number === chosenNumber && row.window.included)
    ? chosenNumber
    : firstIncluded;
  const included = rows.filter(({ window }) => window.included).map(({ number }) => number);
  const step = (by: number) => {
    const next = included[included.indexOf(chosen ?? 0) + by];
    if (next !== undefined) setChosenNumber(next);
  };
  const mayDecide = fit.state === "submitted" && fit.supersededAt === null && shown.may.review;
  const [keysShown, setKeysShown] = useState(false);
  const [singleKeys, setSingleKeys] = useSingleKeys();
  useKeys(
    {
      arrowleft: () => step(-1),
      arrowright: () => step(1),
      g: () => document.getElementById("residuals")?.scrollIntoView(),
      n: () => document.getElementById(NOTE_ID)?.focus(),
      "shift+a": () => document.getElementById(APPROVE_ID)?.click(),
      "shift+r": () => document.getElementById(RETURN_ID)?.click(),
      "1": () => setAxis(axes[0]?.name ?? axis),
      "2": () => setAxis(axes[1]?.name ?? axis),
      "?": () => setKeysShown(true),
    },
    singleKeys,
  );
  const axisLabel = axes.find(({ name }) => name === axis)?.label ?? axis;
  const level = useMemo(
    () => parseProtocol(shown.protocolDocument).uncertainty.level,
    [shown.protocolDocument],
  );

  const drawings = useMemo(
    () =>
      drawn.status === "ready"
        ? rows.flatMap((row) => {
            const drawing = drawn.drawings[row.index];
            return drawing?.lines ? [{ row, lines: drawing.lines }] : [];
          })
        : [],
    [drawn, rows],
  );
  const traces = useMemo(
    () =>
      drawings.map(({ row, lines }) => ({
        number: row.number,
        timeMs: lines.timeS.map((s) => (s - row.window.onset_s) * 1000),
        angleDeg: lines.angleDeg,
        residualNm: lines.residualNm,
      })),
    [drawings],
  );
  const torque = useMemo(() => torqueOf(drawings, chosen), [drawings, chosen]);
  const pooled = result.pooled.filter((each) => each.axis === axis);
  const commonFlags = [...(result.recordings[0]?.flags ?? []), ...axisFlags(pooled)];
  const flagsAbove = new Set(commonFlags.map(({ code }) => code));
  const setAside = rows.filter(({ window }) => !window.included).length;

  return (
    <div className="grid min-h-dvh lg:grid-cols-[minmax(0,1fr)_288px] xl:grid-cols-[minmax(0,1fr)_312px]">
      <div className="flex min-w-0 flex-col gap-6 px-5 pt-4 pb-10">
        <div>
          <RecordingHead
            actions={
              <ButtonLink to={`/recordings/${shown.recording.id}`}>
                {shown.may.fit ? "Open the recording to trim" : "Open the recording"}
              </ButtonLink>
            }
            facts={[
              <strong className="text-ink" key="fit">
                Fit {fit.number}
              </strong>,
              <AxisSwitch axes={axes} axis={axis} key="axis" onAxis={setAxis} />,
              <span className="num" key="file">
                {shown.recording.fileName}
              </span>,
              `protocol, version ${fit.protocolNumber}`,
              <span className="flex items-center" key="state">
                <StateMark state={fit.state} word />
              </span>,
              ...(fit.verification === "verified"
                ? []
                : [
                    <span key="verification" title={fit.verificationNote ?? undefined}>
                      {VERIFICATION_WORDS[fit.verification]}
                    </span>,
                  ]),
            ]}
            title={titleOf(shown)}
          />
          <FitNotices shown={shown} />
          <FlagSummary flags={commonFlags} />
        </div>

        <section aria-labelledby="values">
          <h2 className="mb-2" id="values">
            Values over windows
          </h2>
          <div className="grid gap-x-8 gap-y-6">
            {pooled.map((each) => (
              <PooledBlock
                axisLabel={axisLabel}
                flagsAbove={flagsAbove}
                key={each.direction}
                level={level}
                pooled={each}
                windows={rows
                  .map(({ window }) => window)
                  .filter((window) => window.included && window.direction === each.direction)}
              />
            ))}
            {pooled.length === 0 ? (
              <p>No window of this axis is included, so nothing is pooled.</p>
            ) : null}
          </div>
          <p className="mt-2 max-w-prose text-sm text-ink-2">
            The interval is Student’s t over the windows. The bootstrap over windows is a second
            look: it covers only 83, 90 and 93 % at 5, 10 and 20 windows.
          </p>
        </section>

        <section aria-labelledby="torque">
          <h2 className="mb-1" id="torque">
            {chosen === null ? "Torque" : `Torque of window ${chosen}, from its baseline`}
          </h2>
          {drawn.status === "failed" ? (
            <CannotOpen onRetry={drawn.retry} problem={drawn.problem} />
          ) : torque ? (
            <>
              <TorquePlot {...torque} />
              <PlotTable
                heads={["ms", "measured N·m", "modelled N·m", "K N·m", "B N·m", "I N·m"]}
                of="Torque of this window"
                rows={() =>
                  Array.from(torque.timeMs, (ms, i) => [
                    formatNumber(ms, 2),
                    formatNumber(torque.measuredNm[i], 6),
                    formatNumber(torque.modelledNm[i], 6),
                    formatNumber(torque.termsNm.K[i], 6),
                    formatNumber(torque.termsNm.B[i], 6),
                    formatNumber(torque.termsNm.I[i], 6),
                  ])
                }
              />
            </>
          ) : (
            <PlotPlace isWaiting={drawn.status === "waiting"} />
          )}
        </section>

        <ResidualSection
          onSeen={open}
          sampleMs={drawn.status === "ready" ? drawn.sampleMs : 1}
          traces={traces}
        >
          <div className="mt-4">
            <ResidualList
              chosen={chosen}
              onChoose={setChosenNumber}
              windows={drawings.map(({ row, lines }) => ({
                number: row.number,
                rmsNm: row.window.rms_residual ?? 0,
                timeS: lines.timeS,
                residualNm: lines.residualNm,
                words: `towards ${row.window.direction}`,
              }))}
            />
          </div>
        </ResidualSection>

        <section aria-labelledby="windows">
          <h2 className="mb-1" id="windows">
            {countOf(rows.length - setAside, "window")} included, {setAside} set aside
          </h2>
          <WindowTable chosen={chosen} onChoose={setChosenNumber} rows={rows} />
        </section>

        <Provenance
          choices={shown.protocolInWords}
          downloads={
            <span className="flex flex-wrap gap-x-3">
              {["protocol.json", "windows.json", "result.json"].map((document) => (
                <a
                  className="link inline-block min-h-6 font-mono"
                  download
                  href={`/fits/${fit.id}/${document}`}
                  key={document}
                >
                  {document}
                </a>
              ))}
            </span>
          }
          protocolNumber={fit.protocolNumber}
          protocolSha256={fit.protocolSha256}
          result={result}
        />
        {shown.origin ? <p className="text-sm text-ink-2">{shown.origin}</p> : null}
      </div>
      <aside
        aria-label="State of this fit"
        className="border-t border-rule bg-sheet p-4 lg:border-t-0 lg:border-l"
      >
        <div className="flex flex-col gap-6 lg:sticky lg:top-4">
          {mayDecide ? (
            <DecisionPanel
              hasOpenedResiduals={shown.hasOpenedResiduals}
              isBusy={isBusy}
              onDecide={decide}
              said={said}
              whyNot={shown.whyNot}
            />
          ) : (
            <section aria-label="State">
              <h2 className="mb-1">State</h2>
              <p>{stateInWords(shown)}</p>
              {shown.may.review ? (
                <p className="mt-1">
                  <Link className="link" to="/reviews">
                    Go on to the fits that wait
                  </Link>
                </p>
              ) : null}
              {shown.may.submit &&
              fit.supersededAt === null &&
              (fit.state === "draft" || fit.state === "returned") ? (
                <div className="mt-2">
                  <Button
                    busy={isBusy}
                    busyLabel="Submitting"
                    disabled={fit.verification !== "verified"}
                    look="do"
                    onClick={submit}
                    title={
                      fit.verification === "verified"
                        ? undefined
                        : "A fit is submitted once the server has computed the same numbers"
                    }
                    type="button"
                  >
                    Submit for review
                  </Button>
                </div>
              ) : null}
              {said ? (
                <p className="mt-2 border-l-2 border-ink pl-2.5" role="alert">
                  {said}
                </p>
              ) : null}
            </section>
          )}
          {shown.reviews.length > 0 ? (
            <section aria-label="Decisions">
              <h2 className="mb-1">Decisions</h2>
              <ul>
                {shown.reviews.map((review) => (
                  <li className="border-b border-rule py-1.5" key={review.id}>
                    <p className="flex items-center gap-2">
                      <StateMark state={review.decision} word />
                    </p>
                    {review.note ? <p className="whitespace-pre-line">{review.note}</p> : null}
                    <p className="text-sm text-ink-2">
                      {review.reviewerName}, {formatMoment(review.decidedAt)}
                    </p>
                  </li>
                ))}
              </ul>
            </section>
          ) : null}
          <FitHistory fits={shown.history} shownId={fit.id} />
          <button
            aria-keyshortcuts="?"
            className="min-h-6 self-start text-sm text-ink-2 underline decoration-edge underline-offset-3"
            onClick={() => setKeysShown(true)}
            type="button"
          >
            Keys
          </button>
        </div>
      </aside>
      <KeysDialog
        enabled={singleKeys}
        lines={mayDecide ? [...DECIDING_KEYS, ...FIT_KEYS] : FIT_KEYS}
        onClose={() => setKeysShown(false)}
        onEnable={setSingleKeys}
        open={keysShown}
      />
    </div>
  );
}

const FIT_KEYS: readonly KeyLine[] = [
  { keys: ["←", "→"], what: "previous, next window" },
  { keys: ["G"], what: "go to the residuals" },
  { keys: ["1", "2"], what: "first, second axis" },
  { keys: ["?"], what: "this list" },
];
const DECIDING_KEYS: readonly KeyLine[] = [
  { keys: ["N"], what: "write the note" },
  { keys: ["Shift", "A"], what: "approve" },
  { keys: ["Shift", "R"], what: "return to the biomechanist" },
];

function titleOf({ participant, condition, posture }: Shown): string {
  return `${participant}, ${condition}, ${posture}`;
}

function stateInWords({ fit, may: allowed }: Shown): string {
  if (fit.supersededAt !== null) return "A newer fit of this recording took this one’s place.";
  switch (fit.state) {
    case "draft":
      return "A draft: saved, not submitted yet.";
    case "submitted":
      return allowed.review ? "Submitted." : "Submitted: it waits for a reviewer.";
    case "returned":
      return "Returned: the reviewer’s note says what to change.";
    case "approved":
      return "Approved by a reviewer.";
  }
}

/** One window of an axis, with its place among all windows of the fit. */
type Row = FitWindowRow & { index: number };

function rowsOf({ fit }: Shown, axis: string): Row[] {
  const rows: Row[] = [];
  for (const [index, window] of fit.result.windows.entries()) {
    const saved = fit.windows[index];
    if (window.axis !== axis || saved === undefined) continue;
    rows.push({
      index,
      number: rows.length + 1,
      window,
      origin: saved.origin,
      editedByName: saved.editedByName,
      editedAt: saved.editedAt,
    });
  }
  return rows;
}

/** The chosen window's torque from its baseline: what the model says, term by term. */
function torqueOf(
  drawings: readonly { row: Row; lines: NonNullable<WindowDrawing["lines"]> }[],
  chosen: number | null,
) {
  const found = drawings.find(({ row }) => row.number === chosen);
  if (!found) return null;
  const { termsNm, residualNm, timeS } = found.lines;
  const modelledNm = termsNm.K.map(
    (value, i) => value + (termsNm.B[i] as number) + (termsNm.I[i] as number),
  );
  return {
    timeMs: timeS.map((s) => (s - found.row.window.onset_s) * 1000),
    measuredNm: modelledNm.map((value, i) => value + (residualNm[i] as number)),
    modelledNm,
    termsNm,
  };
}

function PlotPlace({ isWaiting }: { isWaiting: boolean }) {
  return (
    <div
      aria-busy={isWaiting}
      className="flex h-60 items-center justify-center border border-rule text-sm text-ink-2"
    >
      {isWaiting ? "Reading the recording" : "No window of this axis is included."}
    </div>
  );
}

function FitNotices({ shown }: { shown: Shown }) {
  const { fit, history, reviews } = shown;
  const newer = history.find((each) => each.id === fit.supersededBy);
  const last = reviews.at(-1);
  return (
    <>
      {fit.supersededAt !== null ? (
        <Notice>
          This fit is superseded.{" "}
          {newer ? (
            <Link className="link" to={`/fits/${newer.id}`}>
              Fit {newer.number} took its place
            </Link>
          ) : null}
        </Notice>
      ) : null}
      {fit.state === "returned" && last ? (
        <Notice>
          Returned by {last.reviewerName}: <span className="whitespace-pre-line">{last.note}</span>
        </Notice>
      ) : null}
      {fit.verification === "differs" ? <Notice urgent>{fit.verificationNote}</Notice> : null}
    </>
  );
}

/** What a person sends from this page, and what the server answered. */
function useDecision({ fit, may: allowed, hasOpenedResiduals: opened, whyNot }: Shown) {
  const fetcher = useFetcher<typeof clientAction>();
  const opening = useFetcher<typeof clientAction>();
  const { revalidate } = useRevalidator();
  const answer = fetcher.state === "idle" ? fetcher.data : undefined;
  const openingAnswer = opening.state === "idle" ? opening.data : undefined;
  // biome-ignore lint/correctness/useExhaustiveDependencies: each answer is taken up once.
  useEffect(() => {
    if (answer !== undefined && answer.status !== "offline") revalidate();
  }, [answer]);
  // biome-ignore lint/correctness/useExhaustiveDependencies: each answer is taken up once.
  useEffect(() => {
    if (openingAnswer?.status === "opened") revalidate();
  }, [openingAnswer]);

  type Sent = z.input<typeof actionSchema>;
  const { submit: send } = fetcher;
  const { submit: note, state: noting } = opening;
  const sendJson = (sent: Sent) =>
    void send(sent, {
      method: "post",
      encType: "application/json",
      defaultShouldRevalidate: false,
    });
  const mayOpen = allowed.review && whyNot === null && !opened && noting === "idle";
  return {
    isBusy: fetcher.state !== "idle",
    said: answer && "sentence" in answer ? answer.sentence : null,
    decide: (decision: (typeof DECISIONS)[number], text: string) =>
      sendJson({ intent: "decide", version: fit.version, decision, note: text }),
    submit: () => sendJson({ intent: "submit", version: fit.version }),
    open: useCallback(() => {
      if (!mayOpen) return;
      void note(
        { intent: "open_residuals" },
        { method: "post", encType: "application/json", defaultShouldRevalidate: false },
      );
    }, [mayOpen, note]),
  };
}

export function ErrorBoundary() {
  return (
    <div className="px-5 pt-4">
      <ErrorScreen />
    </div>
  );
}
