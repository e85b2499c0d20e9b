import { PassThrough } from "node:stream";
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
import { nonceContext } from "#app/auth/context.server.ts";
import { log } from "#app/services/log.server.ts";

export const streamTimeout = 5_000;

export default function handleRequest(
  request: Request,
  status: number,
  headers: Headers,
  routerContext: EntryContext,
  loadContext: RouterContextProvider,
): Promise<Response> | Response {
  keepFromCaches(headers);
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
          const body = new PassThrough({
            final(callback) {
              clearTimeout(timer);
              callback();
            },
          });
          pipe(body);
          resolve(new Response(createReadableStreamFromReadable(body), { status, headers }));
        },
        onShellError: reject,
        onError(error) {
          // An error before the shell stands is thrown, and logged where it arrives.
          if (isShellRendered) log.error({ err: error }, "A page broke off");
        },
      },
    );
    // A page that waits longer is ended, so that its boundaries can say so.
    const timer = setTimeout(abort, streamTimeout + 1000);
  });
}

export const handleDataRequest: HandleDataRequestFunction = (response) => {
  keepFromCaches(response.headers);
  return response;
};

export const handleError: HandleErrorFunction = (error, { request }) => {
  // Whoever asked has gone.
  if (request.signal.aborted) return;
  log.error({ err: error, method: request.method, path: new URL(request.url).pathname }, "Failed");
};

/** What a person of one lab saw is not shown to the next one at the same machine. */
function keepFromCaches(headers: Headers): void {
  if (!headers.has("Cache-Control")) headers.set("Cache-Control", "private, no-store");
}
