import type { RecordingMap } from "#app/domain/recording.ts";
import type { HeldRecording, Place } from "./batch.ts";

/**
 * Brings the bytes of one file to the storage, unchanged and in parts, and waits until the server
 * has verified its own copy. What arrived stays: a broken connection is taken up where it broke.
 */

export interface PartAddress {
  number: number;
  url: string;
}

/** What finishing an upload says of where the recording belongs. */
export interface Finish extends Place {
  map: RecordingMap;
  /** Kept with the study; left out where it did not change. */
  fileNamePattern?: string | null;
}

export type FinishAnswer =
  | { status: "open" }
  | { status: "verifying"; recordingId: string }
  | { status: "ready"; recordingId: string }
  | { status: "duplicate"; recording: HeldRecording }
  | { status: "incomplete"; sentence: string }
  | { status: "refused"; sentence: string };

/** The server and its storage, as the browser reaches them. A call that fails throws `SendError`. */
export interface SendPort {
  open(file: {
    fileName: string;
    sizeBytes: number;
    sha256: string;
  }): Promise<
    | { status: "open"; uploadId: string; partSizeBytes: number; parts: PartAddress[] }
    | { status: "duplicate"; recording: HeldRecording }
    | { status: "refused"; sentence: string }
  >;
  /** Fresh addresses for these parts. */
  renew(
    uploadId: string,
    numbers: readonly number[],
  ): Promise<{ status: "open"; parts: PartAddress[] } | { status: "ended"; sentence: string }>;
  /** PUTs one part; answers its ETag. */
  putPart(
    url: string,
    bytes: Blob,
    onSent: (sentBytes: number) => void,
    signal: AbortSignal,
  ): Promise<string>;
  finish(
    uploadId: string,
    input: Finish & { parts: { number: number; etag: string }[] },
  ): Promise<FinishAnswer>;
  /** How the upload stands. */
  look(uploadId: string): Promise<FinishAnswer>;
  cancel(uploadId: string): Promise<void>;
}

/** Nothing came back, or the answer was no. */
export class SendError extends Error {
  override name = "SendError";
  constructor(
    message: string,
    /** Whether another try may help by itself, once a person has done something, or never. */
    readonly again: "soon" | "by_hand" | "never",
  ) {
    super(message);
  }
}

/** An upload under way; kept over a broken connection. */
export interface Upload {
  id: string;
  partSizeBytes: number;
  addresses: Map<number, string>;
  /** ETags of the parts that arrived. */
  arrived: Map<number, string>;
}

export type Step = { step: "sending"; sentBytes: number } | { step: "verifying" };

export type Sent =
  | { status: "ready"; recordingId: string }
  | { status: "held"; recording: HeldRecording }
  | { status: "refused"; sentence: string }
  | { status: "broken"; sentence: string }
  | { status: "stopped" };

export interface SendOptions {
  port: SendPort;
  file: { name: string; sizeBytes: number; sha256: string; bytes: Blob };
  finish: () => Finish;
  /** Of an earlier try, or null. */
  upload: Upload | null;
  /** The upload as it is from now on; null once it is over. */
  onUpload: (upload: Upload | null) => void;
  onStep: (step: Step) => void;
  signal: AbortSignal;
  /** Resolves after so long, or at once when the signal is aborted. */
  wait: (ms: number, signal: AbortSignal) => Promise<void>;
}

/** Tries of one part or one question before a person is asked. */
const PAUSES_MS = [1000, 3000, 9000];
/** Between two looks at a recording that is being verified. */
const LOOK_EVERY_MS = 1500;

/** Sends one file; never throws. */
export async function sendFile(options: SendOptions): Promise<Sent> {
  const { signal, onUpload } = options;
  try {
    const sent = await send(options);
    if (sent.status !== "broken") onUpload(null);
    return sent;
  } catch (error) {
    if (signal.aborted) return { status: "stopped" };
    const isRefused = error instanceof SendError && error.again === "never";
    if (isRefused) onUpload(null);
    return {
      status: isRefused ? "refused" : "broken",
      sentence: error instanceof Error ? error.message : String(error),
    };
  }
}

async function send(options: SendOptions): Promise<Sent> {
  const { port, onStep, signal, onUpload } = options;
  const opened = options.upload ?? (await openUpload(options));
  if ("status" in opened) return opened;
  onUpload(opened);
  if (options.upload) {
    // Addresses of an earlier try may have run out meanwhile.
    const ended = await renew(options, opened, missingParts(options, opened));
    if (ended) return ended;
  }

  let incomplete = 0;
  for (;;) {
    const ended = await sendParts(options, opened);
    if (ended) return ended;
    onStep({ step: "verifying" });
    const parts = [...opened.arrived].map(([number, etag]) => ({ number, etag }));
    let answer = await persist(options, () =>
      port.finish(opened.id, { ...options.finish(), parts }),
    );
    while (answer.status === "verifying" || answer.status === "open") {
      // "open": the first question was lost before it arrived.
      if (answer.status === "open") {
        answer = await persist(options, () =>
          port.finish(opened.id, { ...options.finish(), parts }),
        );
        continue;
      }
      await options.wait(LOOK_EVERY_MS, signal);
      if (signal.aborted) return { status: "stopped" };
      answer = await persist(options, () => port.look(opened.id));
    }
    switch (answer.status) {
      case "ready":
        return answer;
      case "duplicate":
        return { status: "held", recording: answer.recording };
      case "refused":
        return answer;
      case "incomplete":
        // The storage does not have what it confirmed: everything goes once more, then a person is asked.
        opened.arrived.clear();
        incomplete += 1;
        if (incomplete > 1) return { status: "broken", sentence: answer.sentence };
        onStep({ step: "sending", sentBytes: 0 });
        await renew(options, opened, missingParts(options, opened));
    }
  }
}

async function openUpload(options: SendOptions): Promise<Upload | Sent> {
  const { port, file } = options;
  const answer = await persist(options, () =>
    port.open({ fileName: file.name, sizeBytes: file.sizeBytes, sha256: file.sha256 }),
  );
  switch (answer.status) {
    case "open":
      return {
        id: answer.uploadId,
        partSizeBytes: answer.partSizeBytes,
        addresses: new Map(answer.parts.map(({ number, url }) => [number, url])),
        arrived: new Map(),
      };
    case "duplicate":
      return { status: "held", recording: answer.recording };
    case "refused":
      return answer;
  }
}

/** Sends the parts that have not arrived; null once all have. */
async function sendParts(options: SendOptions, upload: Upload): Promise<Sent | null> {
  const { port, file, onStep, signal } = options;
  const rangeOf = (number: number) => ({
    start: (number - 1) * upload.partSizeBytes,
    end: Math.min(number * upload.partSizeBytes, file.sizeBytes),
  });
  const arrivedBytes = () =>
    [...upload.arrived.keys()].reduce((sum, number) => {
      const { start, end } = rangeOf(number);
      return sum + end - start;
    }, 0);
  onStep({ step: "sending", sentBytes: arrivedBytes() });
  for (const number of missingParts(options, upload)) {
    const { start, end } = rangeOf(number);
    const before = arrivedBytes();
    for (let attempt = 0; ; attempt += 1) {
      if (signal.aborted) return { status: "stopped" };
      try {
        const url = upload.addresses.get(number);
        if (url === undefined) throw new SendError("The part has no address.", "soon");
        const etag = await port.putPart(
          url,
          file.bytes.slice(start, end),
          (sentBytes) => onStep({ step: "sending", sentBytes: before + sentBytes }),
          signal,
        );
        upload.arrived.set(number, etag);
        break;
      } catch (error) {
        if (signal.aborted) return { status: "stopped" };
        const pauseMs = PAUSES_MS[attempt];
        const isFinal = error instanceof SendError && error.again !== "soon";
        if (isFinal || pauseMs === undefined) throw error;
        onStep({ step: "sending", sentBytes: before });
        await options.wait(pauseMs, signal);
        // An address lives ten minutes: the part and those behind it get fresh ones.
        const ended = await renew(options, upload, missingParts(options, upload));
        if (ended) return ended;
      }
    }
  }
  return null;
}

async function renew(
  options: SendOptions,
  upload: Upload,
  numbers: readonly number[],
): Promise<Sent | null> {
  if (numbers.length === 0) return null;
  const answer = await persist(options, () => options.port.renew(upload.id, numbers));
  if (answer.status === "ended") return { status: "refused", sentence: answer.sentence };
  for (const { number, url } of answer.parts) upload.addresses.set(number, url);
  return null;
}

/** Asks the server, and again after a pause where the connection failed. */
async function persist<Answer>(
  { signal, wait }: Pick<SendOptions, "signal" | "wait">,
  ask: () => Promise<Answer>,
): Promise<Answer> {
  for (let attempt = 0; ; attempt += 1) {
    try {
      return await ask();
    } catch (error) {
      const pauseMs = PAUSES_MS[attempt];
      const isFinal = error instanceof SendError && error.again !== "soon";
      if (isFinal || pauseMs === undefined || signal.aborted) throw error;
      await wait(pauseMs, signal);
      if (signal.aborted) throw error;
    }
  }
}

function missingParts({ file }: Pick<SendOptions, "file">, upload: Upload): number[] {
  const count = Math.ceil(file.sizeBytes / upload.partSizeBytes);
  return Array.from({ length: count }, (_, index) => index + 1).filter(
    (number) => !upload.arrived.has(number),
  );
}
