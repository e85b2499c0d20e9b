import { randomBytes, randomUUID } from "node:crypto";
import { join } from "node:path";
import { createRequestHandler } from "@react-router/express";
import compression from "compression";
import express, { type ErrorRequestHandler, type RequestHandler } from "express";
import { RouterContextProvider } from "react-router";
import {
  deskContext,
  gateContext,
  gzipContext,
  nonceContext,
  remoteAddressContext,
} from "#app/auth/context.server.ts";
import { type Desk, openDesk, readSessionSecret } from "#app/auth/desk.server.ts";
import { type Gate, openGate } from "#app/auth/gate.server.ts";
import { type Env, readEnv } from "#app/env.server.ts";
import { log } from "#app/services/log.server.ts";
import { resumeWork, stopWork } from "#app/workflows/resume-work.server.ts";

const env = readEnv(process.env);
const CLIENT_FOLDER = join(import.meta.dirname, "..", "client");
const YEAR_S = 31_536_000;
/** What failed for the moment (the storage did not answer) is tried again after this. */
const RESUME_EVERY_MS = 5 * 60 * 1000;

/** Filled by `ready()`; nothing is served before. */
let open: { desk: Desk; gate: Gate } | null = null;
let resuming: NodeJS.Timeout | undefined;

/**
 * Opens the database (running the migrations) and what stands around it, and begins to take up the
 * background work that the process before this one left.
 */
export async function ready(): Promise<void> {
  if (env.isDemo) log.level = "warn";
  const desk = await openDesk(env);
  const gate = await openGate(desk, {
    sessionSecret: readSessionSecret(env),
    secureCookies: env.publicUrl.protocol === "https:",
    isDemo: env.isDemo,
  });
  open = { desk, gate };
  const resume = () =>
    resumeWork(desk).catch((error: unknown) => log.error({ err: error }, "Resuming work failed"));
  // A storage that does not answer now must not keep pages from being served.
  void resume();
  resuming = setInterval(resume, RESUME_EVERY_MS).unref();
}

/** After the last answer: ends the background work and closes what `ready` opened. */
export async function closing(): Promise<void> {
  clearInterval(resuming);
  await stopWork();
  open?.desk.store.close();
  open = null;
}

export const app = express();
app.disable("x-powered-by");
// This server speaks http: where browsers come by https, something on this machine or its private
// network stands in between, and says by which address and scheme it was asked. Where they come by
// http, others of that network may be browsers, and would choose the address that tries are counted by.
app.set(
  "trust proxy",
  env.publicUrl.protocol === "https:" ? "loopback, linklocal, uniquelocal" : "loopback",
);

app.use(logRequests());
app.use(secureHeaders(env));
app.use(refuseLargeBodies());
// Built files carry a hash of their bytes in their names. Pages compress themselves as they stream
// (entry.server.tsx): this package keeps a listener for each piece of a stream that waits.
app.use(
  "/assets",
  assetPolicy(env),
  compression(),
  express.static(join(CLIENT_FOLDER, "assets"), {
    immutable: true,
    maxAge: YEAR_S * 1000,
    fallthrough: false,
  }),
);
app.use(express.static(CLIENT_FOLDER, { index: false, maxAge: "1h" }));
app.use(refuseOtherSites(env));
app.use(
  createRequestHandler({
    build: () => import("virtual:react-router/server-build"),
    getLoadContext: (request, response) => {
      if (open === null) throw new Error("The server is not ready.");
      const context = new RouterContextProvider();
      context.set(deskContext, open.desk);
      context.set(gateContext, open.gate);
      context.set(remoteAddressContext, request.ip ?? "unknown");
      context.set(nonceContext, response.locals.nonce);
      context.set(gzipContext, request.acceptsEncodings("gzip") === "gzip");
      return context;
    },
  }),
);
app.use(sayFailure());

/** The path without its query, which may hold what a person typed. */
function logRequests(): RequestHandler {
  return (request, response, next) => {
    const startedMs = performance.now();
    const id = randomUUID();
    response.setHeader("X-Request-Id", id);
    const { path, method } = request;
    const isQuiet = path === "/health" || path === "/ready" || path.startsWith("/assets/");
    response.once("close", () => {
      if (isQuiet && response.statusCode < 400) return;
      const ms = Math.round(performance.now() - startedMs);
      log.info({ id, method, path, status: response.statusCode, ms }, "Answered");
    });
    next();
  };
}

function secureHeaders({ publicUrl, storage }: Env): RequestHandler {
  return (_request, response, next) => {
    const nonce = randomBytes(16).toString("base64");
    response.locals.nonce = nonce;
    response.set({
      "Content-Security-Policy": [
        "default-src 'self'",
        `script-src 'self' 'nonce-${nonce}'`,
        "style-src 'self'",
        // Places and sizes of marks are set as properties; no rule can come in by them.
        "style-src-attr 'unsafe-inline'",
        `connect-src 'self' ${storage.endpoint}`,
        "img-src 'self' data: blob:",
        "font-src 'self'",
        "worker-src 'self'",
        "object-src 'none'",
        "base-uri 'none'",
        "form-action 'self'",
        "frame-ancestors 'none'",
      ].join("; "),
      "X-Content-Type-Options": "nosniff",
      "Referrer-Policy": "same-origin",
      "Cross-Origin-Opener-Policy": "same-origin",
      "Cross-Origin-Resource-Policy": "same-origin",
      "Permissions-Policy":
        "camera=(), microphone=(), geolocation=(), payment=(), usb=(), serial=()",
    });
    if (publicUrl.protocol === "https:") {
      response.setHeader("Strict-Transport-Security", `max-age=${YEAR_S}`);
    }
    next();
  };
}

/** A worker obeys the policy that its own script came with; hashing there runs as WebAssembly. */
function assetPolicy({ storage }: Env): RequestHandler {
  const policy = [
    "default-src 'none'",
    "script-src 'self' 'wasm-unsafe-eval'",
    `connect-src 'self' ${storage.endpoint}`,
    "frame-ancestors 'none'",
  ].join("; ");
  return (_request, response, next) => {
    response.setHeader("Content-Security-Policy", policy);
    next();
  };
}

/** Forms, and a fit's windows and numbers; files go straight to the storage. */
const MOST_FORM_BYTES = 1024 * 1024;
const MOST_JSON_BYTES = 16 * 1024 * 1024;

/** A body is read whole into memory, so its length is known and bounded before. */
function refuseLargeBodies(): RequestHandler {
  return (request, response, next) => {
    const most = request.is("application/json") ? MOST_JSON_BYTES : MOST_FORM_BYTES;
    const hasLength = request.get("Transfer-Encoding") === undefined;
    if (hasLength && Number(request.get("Content-Length") ?? 0) <= most) return next();
    response
      .status(hasLength ? 413 : 411)
      .set("Connection", "close")
      .type("text/plain")
      .send("This request is too large, or does not say how large it is.");
  };
}

/**
 * What changes something must come from a page of ours. Browsers say so in Sec-Fetch-Site or, older
 * ones, in Origin; what sends neither is no browser, and holds no cookie that it did not ask for.
 */
function refuseOtherSites({ publicUrl }: Env): RequestHandler {
  return (request, response, next) => {
    if (["GET", "HEAD", "OPTIONS"].includes(request.method)) return next();
    const site = request.get("Sec-Fetch-Site");
    const origin = request.get("Origin");
    const here = [publicUrl.origin, `${request.protocol}://${request.get("Host")}`];
    const isOurs =
      site !== undefined
        ? site === "same-origin" || site === "none"
        : origin === undefined || here.includes(origin);
    if (isOurs) return next();
    response
      .status(403)
      .type("text/plain")
      .send("This came from a page of another site. Open Ogee itself and try again there.");
  };
}

/** What the router could not turn into a page. Four parameters make it express's error handler. */
function sayFailure(): ErrorRequestHandler {
  return (error, request, response, next) => {
    const status = Number(error?.status ?? 500);
    if (status >= 500)
      log.error({ err: error, method: request.method, path: request.path }, "Failed");
    if (response.headersSent) return next(error);
    response.status(status).type("text/plain").send(sentenceOf(status));
  };
}

function sentenceOf(status: number): string {
  if (status === 404) return "There is nothing at this address.";
  if (status < 500) return "This request is not readable: load the page again.";
  return "Something went wrong on our side. Load the page again; if it happens again, tell whoever runs Ogee in your lab.";
}
