import { RouterContextProvider } from "react-router";
import { deskContext, gateContext, remoteAddressContext } from "#app/auth/context.server.ts";
import { type Gate, openGate } from "#app/auth/gate.server.ts";
import type { TestLab } from "./lab.ts";

export const TEST_ORIGIN = "http://127.0.0.1:4300";

/** What stands between the network and a loader or an action, for tests that call those directly. */
export function openTestGate(lab: TestLab, isDemo = false): Promise<Gate> {
  return openGate(lab.desk, {
    sessionSecret: "a secret of this test alone, long enough",
    secureCookies: false,
    isDemo,
  });
}

/** The `Cookie` header of a new session. */
export async function signInAs(
  gate: Gate,
  personId: string,
  labId: string | null,
): Promise<string> {
  const session = await gate.sessions.getSession();
  session.set("personId", personId);
  session.set("labId", labId);
  return cookieOf(await gate.sessions.commitSession(session));
}

/** What a browser sends back of a `Set-Cookie` header. */
export function cookieOf(setCookie: string | null): string {
  return setCookie?.split(";")[0] ?? "";
}

export interface Visit {
  /** From `signInAs`; left out: a stranger. */
  cookie?: string;
  /** A posted form; left out: the address is read. */
  form?: Record<string, string>;
  /** A posted document, as a script of a page sends it. */
  json?: unknown;
  headers?: Record<string, string>;
  remoteAddress?: string;
}

/** What the router hands to a loader or an action at this address. */
export function visit<Params extends Record<string, string>>(
  lab: TestLab,
  gate: Gate,
  path: string,
  params: Params,
  { cookie, form, json, headers = {}, remoteAddress = "192.0.2.1" }: Visit = {},
) {
  const url = new URL(path, TEST_ORIGIN);
  const body = form ? new URLSearchParams(form) : json !== undefined ? JSON.stringify(json) : null;
  const request = new Request(url, {
    method: body === null ? "GET" : "POST",
    body,
    headers: {
      ...(json === undefined ? {} : { "Content-Type": "application/json" }),
      ...(body === null ? {} : { "Content-Length": String(Buffer.byteLength(String(body))) }),
      ...(cookie === undefined ? {} : { Cookie: cookie }),
      ...headers,
    },
  });
  const context = new RouterContextProvider();
  context.set(deskContext, lab.desk);
  context.set(gateContext, gate);
  context.set(remoteAddressContext, remoteAddress);
  return { request, url, params, context, pattern: url.pathname };
}
