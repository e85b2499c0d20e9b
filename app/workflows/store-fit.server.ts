import { createHash } from "node:crypto";
import { z } from "zod";
import { type Transaction, violatedConstraint } from "#app/db/client.server.ts";
import { recordEvent } from "#app/db/events.server.ts";
import {
  type FitAtAGlance,
  type FitWindow,
  findCurrentFit,
  findCurrentFitRow,
  findRecordingContext,
  insertFit,
  listFitWindows,
  nextFitNumber,
  type RecordingContext,
  readChoices,
  supersedeFit,
} from "#app/db/fits.server.ts";
import { findProtocol, type ProtocolRow } from "#app/db/protocols.server.ts";
import {
  isSameWindow,
  resultSchema,
  type SavedWindow,
  savedWindowSchema,
} from "#app/domain/fit.ts";
import { compileProtocol, ProtocolError } from "#app/domain/protocol.ts";
import { notFound } from "#app/domain/refusal.ts";
import type { Actor } from "#app/domain/role.ts";
import type { Result, ResultPooled } from "#app/engine/types.ts";
import type { Desk } from "./desk.server.ts";
import { requireAbility } from "./permission.server.ts";
import { queueSecondLook } from "./verify-fit.server.ts";

/** As many as a recording of hours has; a longer list is no list of perturbations. */
const MOST_WINDOWS = 5000;

export const storeFitSchema = z.strictObject({
  protocolId: z.string(),
  /** The fit that the person saw as the current one; null where there was none. */
  basedOnFitId: z.string().nullable(),
  windows: z.array(savedWindowSchema).max(MOST_WINDOWS),
  result: resultSchema,
});

export interface StoreFit {
  recordingId: string;
  protocolId: string;
  basedOnFitId: string | null;
  windows: SavedWindow[];
  result: Result;
}

export type StoredFit =
  | { status: "saved"; fitId: string; number: number; version: number }
  /** Somebody saved in between. Both are handed back, so that nothing is lost. */
  | {
      status: "stale";
      sentence: string;
      current: FitAtAGlance;
      mine: { windows: SavedWindow[]; pooled: ResultPooled[] };
    }
  /** Computed under another PROTOCOL than the server's; compute again under this one. */
  | { status: "outdated"; sentence: string; protocolDocument: string; protocolSha256: string }
  | { status: "refused"; sentence: string };

/**
 * Saves a fit as a new draft in the place of the current one. The server compiles the PROTOCOL
 * itself and computes the numbers again in the background before they count as verified.
 */
export async function storeFit(desk: Desk, actor: Actor, input: StoreFit): Promise<StoredFit> {
  requireAbility(actor, "fit");
  const { db } = desk.store;
  const context = await findRecordingContext(db, actor.labId, input.recordingId);
  const protocol = await findProtocol(db, input.protocolId);
  if (!context || protocol?.studyId !== context.study.id) throw notFound();
  const document = compileFor(context, protocol);
  if (document.status === "refused") return document;
  const problem = findProblem(context, input);
  if (problem !== null) return { status: "refused", sentence: problem };
  if (input.result.protocol_sha256 !== document.sha256) {
    return {
      status: "outdated",
      sentence:
        "The protocol that this recording is fitted with has changed since the page was loaded: fit again, then save.",
      protocolDocument: document.text,
      protocolSha256: document.sha256,
    };
  }

  const fitId = desk.clock.newId();
  const stored = await desk.store
    .write((tx) => insertDraft(desk, tx, actor, { ...input, fitId, document, protocol }))
    .catch((error: unknown) => {
      // Another process saved between our look and our write.
      if (violatedConstraint(error) === "unique") return { status: "stale" as const };
      throw error;
    });
  if (stored.status === "saved") {
    queueSecondLook(desk, actor.labId, fitId);
    return { status: "saved", fitId, number: stored.number, version: 1 };
  }
  const current = await findCurrentFit(db, input.recordingId);
  if (!current) throw notFound("The fit that this one was based on does not exist.");
  const { result, protocolSha256, ...summary } = current;
  return {
    status: "stale",
    sentence: `${current.savedByName} saved fit ${current.number} of this recording since you opened it. Nothing is lost: compare the two, then save yours or keep theirs.`,
    current: { ...summary, pooled: result.pooled },
    mine: { windows: input.windows, pooled: input.result.pooled },
  };
}

/** The PROTOCOL text of a recording under one of its study's versions, as exported. */
export function compileFor(
  context: Pick<RecordingContext, "recording" | "axes" | "visit" | "rig">,
  protocol: Pick<ProtocolRow, "choices">,
): { status: "compiled"; text: string; sha256: string } | { status: "refused"; sentence: string } {
  try {
    const { text } = compileProtocol({
      choices: readChoices(protocol.choices),
      map: context.recording.map,
      axes: context.axes,
      geometry: context.visit.geometry,
      rig: context.rig.impedance,
    });
    return {
      status: "compiled",
      text,
      sha256: createHash("sha256").update(text, "utf8").digest("hex"),
    };
  } catch (error) {
    if (error instanceof ProtocolError) return { status: "refused", sentence: error.message };
    throw error;
  }
}

function findProblem({ recording }: RecordingContext, input: StoreFit): string | null {
  const { windows, result } = input;
  if (recording.state !== "ready") {
    return `${recording.fileName} is not ready yet: wait until its stored copy is verified.`;
  }
  if (windows.length === 0) {
    return "There is no window to save: add one by hand, or choose another protocol.";
  }
  const axes = recording.map.axes.map((axis) => axis.name);
  const seen = new Set<string>();
  for (const window of windows) {
    if (!axes.includes(window.axis)) {
      return `The recording has no axis called ${window.axis}: load the page again.`;
    }
    const key = JSON.stringify([window.axis, window.onset_s]);
    if (seen.has(key)) {
      return `The window of ${window.axis} at ${window.onset_s} s stands twice, and would count twice: remove one.`;
    }
    seen.add(key);
  }
  if (
    result.recordings.length !== 1 ||
    result.recordings[0]?.sha256 !== recording.sha256 ||
    result.windows.length !== windows.length
  ) {
    return "The result is not of this recording and these windows: load the page again and fit again.";
  }
  return null;
}

async function insertDraft(
  desk: Desk,
  tx: Transaction,
  actor: Actor,
  input: StoreFit & {
    fitId: string;
    document: { text: string; sha256: string };
    protocol: ProtocolRow;
  },
): Promise<{ status: "saved"; number: number } | { status: "stale" }> {
  const { fitId, recordingId, protocol, document, result } = input;
  const current = await findCurrentFitRow(tx, recordingId);
  if ((current?.id ?? null) !== input.basedOnFitId) return { status: "stale" };
  const at = desk.clock.now();
  const previous = current ? await listFitWindows(tx, current.id) : [];
  if (current) await supersedeFit(tx, current.id, { fitId, at });
  const number = await nextFitNumber(tx, recordingId);
  await insertFit(
    tx,
    {
      id: fitId,
      labId: actor.labId,
      recordingId,
      protocolId: protocol.id,
      number,
      state: "draft",
      verification: "unverified",
      protocolDocument: document.text,
      protocolSha256: document.sha256,
      result: JSON.stringify(result),
      engine: result.engine,
      savedBy: actor.personId,
      savedAt: at,
    },
    input.windows.map((window) => ({
      axis: window.axis,
      onsetS: window.onset_s,
      windowStartMs: window.window_ms[0],
      windowEndMs: window.window_ms[1],
      included: window.included,
      reason: window.reason,
      origin: window.origin,
      ...editOf(window, previous, { editedBy: actor.personId, editedAt: at }),
    })),
  );
  await recordEvent(tx, {
    at,
    labId: actor.labId,
    personId: actor.personId,
    kind: "fit.saved",
    objectType: "fit",
    objectId: fitId,
    detail: {
      recordingId,
      number,
      protocolNumber: protocol.number,
      protocolSha256: document.sha256,
      windows: input.windows.length,
      setAside: input.windows.filter((window) => !window.included).length,
      supersededFitId: current?.id ?? null,
      supersededState: current?.state ?? null,
    },
  });
  return { status: "saved", number };
}

/** Who changed a window stays with it for as long as it stays as it is. */
function editOf(
  window: SavedWindow,
  previous: readonly FitWindow[],
  now: { editedBy: string; editedAt: number },
): { editedBy: string | null; editedAt: number | null } {
  const same = previous.find((before) => isSameWindow(before, window));
  if (same?.editedById) return { editedBy: same.editedById, editedAt: same.editedAt };
  const isByPerson = window.origin === "by_hand" || (window.edited && !same);
  return isByPerson ? now : { editedBy: null, editedAt: null };
}
