import type { HeldRecording } from "./batch.ts";
import { type FinishAnswer, SendError, type SendPort } from "./send-file.ts";

/** The server of this page and its storage, by fetch and by PUT with progress. */
export function httpPort(studyId: string): SendPort {
  const uploads = `/studies/${studyId}/uploads`;
  return {
    open: (file) => ask(uploads, file),
    renew: (uploadId, numbers) => ask(uploads, { uploadId, renew: numbers }),
    putPart,
    finish: (uploadId, input) => ask<FinishAnswer>(`/uploads/${uploadId}/finish`, input),
    look: (uploadId) => ask<FinishAnswer>(`/uploads/${uploadId}/finish`),
    cancel: async (uploadId) => {
      await ask(`/uploads/${uploadId}/cancel`, {});
    },
  };
}

/** Which of these bytes the lab has already. */
export async function findHeld(
  studyId: string,
  sha256s: readonly string[],
): Promise<{ sha256: string; recording: HeldRecording }[]> {
  const query = new URLSearchParams(sha256s.map((sha256) => ["sha256", sha256]));
  const answer = await ask<{ held: { sha256: string; recording: HeldRecording }[] }>(
    `/studies/${studyId}/uploads?${query}`,
  );
  return answer.held;
}

/**
 * JSON from our own server: POST where there is a body, else GET.
 *
 * @throws SendError
 */
async function ask<Answer>(path: string, body?: unknown): Promise<Answer> {
  let response: Response;
  try {
    response = await fetch(path, {
      method: body === undefined ? "GET" : "POST",
      headers: {
        Accept: "application/json",
        ...(body !== undefined && { "Content-Type": "application/json" }),
      },
      body: body === undefined ? null : JSON.stringify(body),
      redirect: "error",
    });
  } catch {
    throw new SendError("The connection to the server broke.", "soon");
  }
  if (response.ok) return (await response.json()) as Answer;
  if (response.status === 401) {
    throw new SendError("You are signed out: sign in in another tab, then continue.", "by_hand");
  }
  if (response.status >= 500) throw new SendError("The server could not answer.", "soon");
  throw new SendError((await response.text()).slice(0, 300), "never");
}

/** XMLHttpRequest, because fetch does not tell how much of a body has gone out. */
function putPart(
  url: string,
  bytes: Blob,
  onSent: (sentBytes: number) => void,
  signal: AbortSignal,
): Promise<string> {
  return new Promise((resolve, reject) => {
    const request = new XMLHttpRequest();
    const stop = () => request.abort();
    const fail = (sentence: string) => {
      signal.removeEventListener("abort", stop);
      reject(new SendError(sentence, "soon"));
    };
    request.open("PUT", url);
    request.upload.addEventListener("progress", (event) => onSent(event.loaded));
    request.addEventListener("load", () => {
      const etag = request.getResponseHeader("ETag");
      if (request.status < 200 || request.status >= 300) {
        fail(`The storage answered ${request.status}.`);
      } else if (etag === null) {
        fail("The storage did not say what arrived: its bucket must let browsers read the ETag.");
      } else {
        signal.removeEventListener("abort", stop);
        resolve(etag);
      }
    });
    request.addEventListener("error", () => fail("The connection to the storage broke."));
    request.addEventListener("timeout", () => fail("The storage did not answer."));
    request.addEventListener("abort", () => fail("The upload was stopped."));
    signal.addEventListener("abort", stop);
    request.send(bytes);
  });
}
