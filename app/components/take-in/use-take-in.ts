import { useCallback, useEffect, useRef, useState } from "react";
import { fileNamePatternProblem } from "#app/domain/file-name.ts";
import { compileProtocol } from "#app/domain/protocol.ts";
import type { FileHead, FileReading, Protocol, TableProtocol } from "#app/engine/types.ts";
import {
  addFiles,
  type Batch,
  type BatchFile,
  findFile,
  type HeldRecording,
  type Job,
  mapOf,
  mayChange,
  nextJob,
  removeFiles,
  type Sending,
  setHash,
  setHead,
  setHeld,
  setReading,
  setSending,
  sha256Of,
  sideOf,
  standingOf,
  startBatch,
  type TakeInStudy,
} from "./batch.ts";
import { recordingMapOf } from "./map-draft.ts";
import { type Finish, type SendPort, sendFile, type Upload } from "./send-file.ts";

/** Where files are looked at before they are taken in: a worker. */
export interface ReadPort {
  hash(file: Blob, onProgress: (bytesRead: number) => void): Promise<string>;
  lookAtHead(
    file: Blob,
    table: TableProtocol,
    axes: readonly { name: string; label: string }[],
  ): Promise<FileHead>;
  readWhole(file: Blob, protocol: Protocol): Promise<FileReading>;
}

export interface TakeInPorts {
  /** Null until the worker is there. */
  read: ReadPort | null;
  send: SendPort;
  findHeld(sha256s: readonly string[]): Promise<{ sha256: string; recording: HeldRecording }[]>;
}

export interface TakeIn {
  batch: Batch;
  change(next: (batch: Batch) => Batch): void;
  chosenId: string | null;
  choose(id: string): void;
  add(files: readonly File[]): void;
  remove(ids: readonly string[]): void;
  /** Sends these files; the ones that broke off go on where they were. */
  take(ids: readonly string[]): void;
  /** Ends the upload of these files; they stay on the list. */
  stop(ids: readonly string[]): void;
}

/** Files on their way to the storage at the same time. */
const AT_ONCE = 2;
/** Hashes that are looked up in one request. */
const LOOKED_UP_AT_ONCE = 50;
const PROGRESS_EVERY_MS = 100;

/**
 * The list of files that are being taken in. One worker looks at one file at a time; two files at
 * most are on their way.
 *
 * @param onDone  nothing is on its way any more
 */
export function useTakeIn(study: TakeInStudy, ports: TakeInPorts, onDone: () => void): TakeIn {
  const [batch, setBatch] = useState(() => startBatch(study.fileNamePattern));
  const [chosenId, setChosenId] = useState<string | null>(null);
  const held = useRef({ batch, study, ports, chosenId, onDone });
  held.current = { ...held.current, study, ports, chosenId, onDone };
  const blobs = useRef(new Map<string, File>());

  // What runs on its own asks for the newest batch, not for the one of its own render.
  const change = useCallback((next: (batch: Batch) => Batch) => {
    held.current.batch = next(held.current.batch);
    setBatch(held.current.batch);
  }, []);

  useReading(held, blobs, change, batch, chosenId, ports.read);
  useLookUp(held, change, batch);
  const { take, stop } = useSending(held, blobs, change);

  const added = useRef(0);
  const add = useCallback(
    (files: readonly File[]) => {
      const chosen = files.map((file) => {
        added.current += 1;
        const id = `file-${added.current}`;
        blobs.current.set(id, file);
        return { id, name: file.name, sizeBytes: file.size, day: dayOf(file.lastModified) };
      });
      change((now) => addFiles(now, held.current.study, chosen));
      setChosenId((now) => now ?? chosen[0]?.id ?? null);
    },
    [change],
  );
  const remove = useCallback(
    (ids: readonly string[]) => {
      stop(ids);
      for (const id of ids) blobs.current.delete(id);
      const { files } = held.current.batch;
      change((now) => removeFiles(now, ids));
      setChosenId((now) => (now && ids.includes(now) ? neighbourOf(files, ids) : now));
    },
    [change, stop],
  );
  return { batch, change, chosenId, choose: setChosenId, add, remove, take, stop };
}

interface Held {
  batch: Batch;
  study: TakeInStudy;
  ports: TakeInPorts;
  chosenId: string | null;
  onDone: () => void;
}
type Change = (next: (batch: Batch) => Batch) => void;
type Ref<T> = { readonly current: T };

/** The day as the clock of this computer had it when the file was written. */
function dayOf(at: number): string {
  const date = new Date(at);
  const pad = (value: number) => String(value).padStart(2, "0");
  return `${date.getFullYear()}-${pad(date.getMonth() + 1)}-${pad(date.getDate())}`;
}

/** The file that stands where one was taken away. */
function neighbourOf(files: readonly BatchFile[], gone: readonly string[]): string | null {
  const at = files.findIndex(({ id }) => gone.includes(id));
  const left = files.filter(({ id }) => !gone.includes(id));
  return left[Math.min(at, left.length - 1)]?.id ?? null;
}

// ---------------------------------------------------------------- looking at files

function useReading(
  held: Ref<Held>,
  blobs: Ref<Map<string, File>>,
  change: Change,
  batch: Batch,
  chosenId: string | null,
  read: ReadPort | null,
): void {
  const isBusy = useRef(false);
  // biome-ignore lint/correctness/useExhaustiveDependencies: whatever changes the next job starts the loop; the loop itself reads the newest state.
  useEffect(() => {
    if (read === null || isBusy.current) return;
    isBusy.current = true;
    (async () => {
      for (;;) {
        const { batch: now, study, chosenId: chosen } = held.current;
        const job = nextJob(now, study, chosen);
        const blob = job && blobs.current.get(job.id);
        if (!job || !blob) {
          // At once, not when the promise settles: a file may be added in between.
          isBusy.current = false;
          return;
        }
        change(await runJob(job, blob, held.current.study, read, change));
      }
    })().catch(() => {
      // The page was left.
      isBusy.current = false;
    });
  }, [batch, chosenId, read]);
}

async function runJob(
  job: Job,
  blob: File,
  study: TakeInStudy,
  read: ReadPort,
  change: Change,
): Promise<(batch: Batch) => Batch> {
  try {
    switch (job.kind) {
      case "head": {
        const head = await read.lookAtHead(blob, job.table, job.axes);
        return (now) => setHead(now, study, job.id, head);
      }
      case "hash": {
        let saidAt = 0;
        const sha256 = await read.hash(blob, (bytesRead) => {
          if (performance.now() - saidAt < PROGRESS_EVERY_MS) return;
          saidAt = performance.now();
          change((now) => setHash(now, job.id, { status: "reading", bytesRead }));
        });
        return (now) => setHash(now, job.id, { status: "read", sha256 });
      }
      case "read": {
        const { protocol } = compileProtocol({
          choices: study.choices,
          map: job.map,
          axes: study.axes,
          geometry: {},
          rig: null,
        });
        const result = await read.readWhole(blob, protocol);
        return (now) => setReading(now, job.id, job.key, result);
      }
    }
  } catch (error) {
    const { name, message } = error instanceof Error ? error : new Error(String(error));
    if (name === "closed") throw error;
    const sentence = sentenceFor(name, message, blob.name);
    switch (job.kind) {
      case "head":
        return (now) => setHead(now, study, job.id, { status: "refused", sentence, line: null });
      case "hash":
        return (now) => setHash(now, job.id, { status: "refused", sentence });
      case "read":
        return (now) =>
          setReading(now, job.id, job.key, { status: "refused", sentence, line: null });
    }
  }
}

/** What a browser or a worker throws, in a sentence that names the file and what to do. */
function sentenceFor(errorName: string, message: string, fileName: string): string {
  switch (errorName) {
    case "NotReadableError":
    case "NotFoundError":
      return `${fileName} can no longer be read on this computer: choose it again.`;
    case "stopped":
    case "RangeError":
      return `${fileName} could not be read in this browser, most likely for lack of memory: close other programs and choose it again.`;
    default:
      return message;
  }
}

/** Asks the server which hashes it knows, each once. */
function useLookUp(held: Ref<Held>, change: Change, batch: Batch): void {
  const asked = useRef(new Set<string>());
  useEffect(() => {
    const open = batch.files
      .map(sha256Of)
      .filter((sha256) => sha256 !== null)
      .filter((sha256) => !asked.current.has(sha256))
      .slice(0, LOOKED_UP_AT_ONCE);
    if (open.length === 0) return;
    for (const sha256 of open) asked.current.add(sha256);
    held.current.ports.findHeld(open).then(
      (found) => change((now) => setHeld(now, found)),
      () => {
        // Opening the upload asks again.
        for (const sha256 of open) asked.current.delete(sha256);
      },
    );
  }, [batch, held, change]);
}

// ---------------------------------------------------------------- sending them

function useSending(held: Ref<Held>, blobs: Ref<Map<string, File>>, change: Change) {
  const uploads = useRef(new Map<string, Upload>());
  const stops = useRef(new Map<string, AbortController>());

  const sendOne = useCallback(
    async (file: BatchFile): Promise<void> => {
      const { ports } = held.current;
      const bytes = blobs.current.get(file.id);
      const sha256 = sha256Of(file);
      if (!bytes || sha256 === null) return;
      const stop = new AbortController();
      stops.current.set(file.id, stop);
      const say = (sending: Sending) => {
        if (!stop.signal.aborted) change((now) => setSending(now, file.id, sending));
      };
      let sentBytes = 0;
      const sent = await sendFile({
        port: ports.send,
        file: { name: file.name, sizeBytes: file.sizeBytes, sha256, bytes },
        finish: () => finishOf(held.current, file.id),
        upload: uploads.current.get(file.id) ?? null,
        onUpload: (upload) => {
          if (upload) uploads.current.set(file.id, upload);
          else uploads.current.delete(file.id);
        },
        onStep: (step) => {
          if (step.step === "verifying") return say({ status: "verifying" });
          sentBytes = step.sentBytes;
          say({ status: "sending", sentBytes });
        },
        signal: stop.signal,
        wait: pause,
      });
      if (stops.current.get(file.id) === stop) stops.current.delete(file.id);
      if (sent.status === "broken") say({ ...sent, sentBytes });
      else if (sent.status !== "stopped") say(sent);
    },
    [held, blobs, change],
  );

  const pump = useCallback(() => {
    for (;;) {
      const { files } = held.current.batch;
      const next = files.find((file) => file.sending.status === "waiting");
      if (!next || stops.current.size >= AT_ONCE) break;
      change((now) => setSending(now, next.id, { status: "sending", sentBytes: 0 }));
      void sendOne(next).then(() => {
        pump();
        const isIdle = stops.current.size === 0;
        if (isIdle) held.current.onDone();
      });
    }
  }, [held, change, sendOne]);

  const take = useCallback(
    (ids: readonly string[]) => {
      change((now) => ids.reduce((list, id) => asWaiting(list, held.current.study, id), now));
      pump();
    },
    [held, change, pump],
  );

  const stop = useCallback(
    (ids: readonly string[]) => {
      // What is being verified has arrived: the server goes on by itself.
      const unsent = ids.filter((id) => {
        const status = findFile(held.current.batch, id)?.sending.status ?? "";
        return ["waiting", "sending", "broken"].includes(status);
      });
      for (const id of unsent) {
        stops.current.get(id)?.abort();
        stops.current.delete(id);
        const upload = uploads.current.get(id);
        uploads.current.delete(id);
        // One that is left behind is given up by the server after a day.
        if (upload) held.current.ports.send.cancel(upload.id).catch(() => {});
      }
      change((now) =>
        unsent.reduce((list, id) => setSending(list, id, { status: "not_asked" }), now),
      );
      pump();
    },
    [held, change, pump],
  );

  useEffect(() => {
    const goOn = () => {
      const { files } = held.current.batch;
      take(files.filter(({ sending }) => sending.status === "broken").map(({ id }) => id));
    };
    window.addEventListener("online", goOn);
    const running = stops.current;
    return () => {
      window.removeEventListener("online", goOn);
      for (const each of running.values()) each.abort();
    };
  }, [held, take]);

  return { take, stop };
}

/** Only what lacks nothing is sent; what broke off or was refused goes by what is said of it now. */
function asWaiting(batch: Batch, study: TakeInStudy, id: string): Batch {
  const file = findFile(batch, id);
  if (!file || !mayChange(file)) return batch;
  const { kind } = standingOf(batch, study, { ...file, sending: { status: "not_asked" } });
  return kind === "good" ? setSending(batch, id, { status: "waiting" }) : batch;
}

function finishOf({ batch, study }: Held, id: string): Finish {
  const file = findFile(batch, id);
  const draft = file && mapOf(batch, study, file);
  const side = file && sideOf(study, file);
  if (!file || !draft || !side) throw new RangeError(`The file ${id} has no map or side.`);
  const pattern = batch.pattern.trim();
  const isNew = pattern !== (study.fileNamePattern ?? "");
  const isUsable = pattern === "" || fileNamePatternProblem(pattern) === null;
  return {
    ...file.place,
    map: recordingMapOf(draft, file.table, side),
    ...(isNew && isUsable && { fileNamePattern: pattern === "" ? null : pattern }),
  };
}

function pause(ms: number, signal: AbortSignal): Promise<void> {
  return new Promise((resolve) => {
    if (signal.aborted) return resolve();
    const end = () => {
      clearTimeout(timer);
      signal.removeEventListener("abort", end);
      resolve();
    };
    const timer = setTimeout(end, ms);
    signal.addEventListener("abort", end);
  });
}
