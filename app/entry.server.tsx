import { PassThrough } from "node:stream";
import { createGzip } from "node:zlib";
import { createReadableStreamFromReadable } from "@react-router/node";
import { isbot } from "isbot";
import { type RenderToPipeableStreamOptions, renderToPipeableStream } from "react-dom/server";
import {
  type EntryContext,
  type HandleDataRequestFunction,
  type HandleErrorFunction,
  type RouterContextProvider,
  ServerRouter,
} from "react-router";
import { gzipContext, nonceContext } from "#app/auth/context.server.ts";
import { log } from "#app/services/log.server.ts";

export const streamTimeout = 5_000;

export default function handleRequest(
  request: Request,
  status: number,
  headers: Headers,
  routerContext: EntryContext,
  loadContext: RouterContextProvider,
): Promise<Response> | Response {
  const isZipped = loadContext.get(gzipContext);
  prepareHeaders(headers, isZipped);
  headers.set("Content-Type", "text/html; charset=utf-8");
  if (request.method === "HEAD") return new Response(null, { status, headers });

  const nonce = loadContext.get(nonceContext);
  const userAgent = request.headers.get("User-Agent");
  const readyOption: keyof RenderToPipeableStreamOptions =
    userAgent !== null && isbot(userAgent) ? "onAllReady" : "onShellReady";
  return new Promise((resolve, reject) => {
    let isShellRendered = false;
    const { pipe, abort } = renderToPipeableStream(
      <ServerRouter context={routerContext} nonce={nonce} url={request.url} />,
      {
        nonce,
        [readyOption]() {
          isShellRendered = true;
          // React flushes what it compresses into, so that a page arrives piece by piece all the same.
          const body = isZipped ? createGzip() : new PassThrough();
          body.once("close", () => clearTimeout(timer));
          pipe(body);
          resolve(new Response(createReadableStreamFromReadable(body), { status, headers }));
        },
        onShellError: reject,
        onError(error) {
          // An error before the shell stands is thrown, and logged where it arrives; of who left
          // before the end there is nothing to say.
          if (isShellRendered && !request.signal.aborted)
            log.error({ err: error }, "A page broke off");
        },
      },
    );
    // A page that waits longer is ended, so that its boundaries can say so.
    const timer = setTimeout(abort, streamTimeout + 1000);
  });
}

export const handleDataRequest: HandleDataRequestFunction = (response, { context }) => {
  const isZipped = context.get(gzipContext) && response.body !== null;
  prepareHeaders(response.headers, isZipped);
  if (!isZipped) return response;
  const { status, statusText, headers } = response;
  const body = response.body?.pipeThrough(new CompressionStream("gzip"));
  return new Response(body, { status, statusText, headers });
};

export const handleError: HandleErrorFunction = (error, { request }) => {
  // Whoever asked has gone.
  if (request.signal.aborted) return;
  log.error({ err: error, method: request.method, path: new URL(request.url).pathname }, "Failed");
};

function prepareHeaders(headers: Headers, isZipped: boolean): void {
  // What a person of one lab saw is not shown to the next one at the same machine.
  if (!headers.has("Cache-Control")) headers.set("Cache-Control", "private, no-store");
  headers.append("Vary", "Accept-Encoding");
  if (isZipped) headers.set("Content-Encoding", "gzip");
}
