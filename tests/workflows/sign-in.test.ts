import { eq } from "drizzle-orm";
import { afterEach, beforeAll, beforeEach, describe, expect, it, vi } from "vitest";
import type { Gate } from "#app/auth/gate.server.ts";
import { hashPassword } from "#app/auth/password.server.ts";
import { findPerson, requireActor, requirePerson } from "#app/auth/require.server.ts";
import { listEvents } from "#app/db/events.server.ts";
import { insertMembership } from "#app/db/people.server.ts";
import { events, memberships, people, sessions } from "#app/db/schema.ts";
import * as chooseLab from "#app/routes/account/choose-lab.tsx";
import * as signIn from "#app/routes/account/sign-in.tsx";
import * as signOut from "#app/routes/account/sign-out.ts";
import { openTestLab, type TestLab } from "../support/lab.ts";
import { cookieOf, openTestGate, signInAs, visit } from "../support/visit.ts";

// Hashing a password costs time on purpose, and some tests try dozens.
vi.setConfig({ testTimeout: 60_000 });

const PASSWORD = "three words and a comma,";
const HOUR_MS = 3_600_000;
let passwordHash: string;
let lab: TestLab;
let gate: Gate;

beforeAll(async () => {
  passwordHash = await hashPassword(PASSWORD);
});

beforeEach(async () => {
  lab = await openTestLab();
  gate = await openTestGate(lab);
  await lab.store.write((tx) => tx.update(people).set({ passwordHash }));
});

afterEach(() => {
  vi.useRealTimers();
  lab.close();
});

const EMAIL = "biomechanist@lab.example";

/** Posts the sign-in form; a redirect and a refusal both come back as status, headers and data. */
async function trySignIn(
  form: Record<string, string>,
  { to, ...options }: { to?: string; cookie?: string; remoteAddress?: string } = {},
) {
  const path = to === undefined ? "/sign-in" : `/sign-in?${new URLSearchParams({ to })}`;
  const answer = await signIn.action(visit(lab, gate, path, {}, { form, ...options }));
  if (answer instanceof Response) {
    return { status: answer.status, headers: answer.headers, data: null };
  }
  const headers = new Headers(answer.init?.headers);
  return { status: answer.init?.status ?? 200, headers, data: answer.data };
}

async function kinds(): Promise<string[]> {
  const rows = await lab.store.db
    .select({ kind: events.kind })
    .from(events)
    .orderBy(events.sequence);
  return rows.map(({ kind }) => kind);
}

async function refusalOf(asking: Promise<unknown>): Promise<Response> {
  const thrown: unknown = await asking.then(
    () => null,
    (reason: unknown) => reason,
  );
  if (!(thrown instanceof Response)) throw new Error("It was not refused.");
  return thrown;
}

describe("signing in", () => {
  it("opens a session in the person's one lab and goes on to what was asked for", async () => {
    const answer = await trySignIn(
      { email: ` ${EMAIL.toUpperCase()} `, password: PASSWORD },
      { to: "/studies/s?x=1" },
    );
    expect(answer.status).toBe(302);
    expect(answer.headers.get("Location")).toBe("/studies/s?x=1");
    const cookie = cookieOf(answer.headers.get("Set-Cookie"));
    const args = visit(lab, gate, "/", {}, { cookie });
    const { actor, person, lab: where } = await requireActor(args.request, args.context);
    expect(person.email).toBe(EMAIL);
    expect(where.name).toBe("Movement room");
    expect(actor).toEqual(lab.actor("biomechanist"));
    const [event] = await listEvents(lab.store.db, lab.lab.id);
    expect(event).toMatchObject({ kind: "person.signed_in", personId: person.id });
  });

  it("sets a cookie that scripts cannot read and other sites do not send", async () => {
    const { headers } = await trySignIn({ email: EMAIL, password: PASSWORD });
    const cookie = headers.get("Set-Cookie") ?? "";
    expect(cookie).toMatch(/^ogee=.*; Path=\/; HttpOnly; SameSite=Lax$/);
    expect(cookie).toMatch(/Max-Age=604800/);
  });

  it("keeps only a hash of what the cookie holds", async () => {
    const { headers } = await trySignIn({ email: EMAIL, password: PASSWORD });
    const cookie = decodeURIComponent(cookieOf(headers.get("Set-Cookie")));
    const value = cookie.slice("ogee=".length).split(".")[0] ?? "";
    const token: unknown = JSON.parse(Buffer.from(value, "base64").toString());
    expect(token).toMatch(/^[\w-]{43}$/);
    expect(JSON.stringify(await lab.store.db.select().from(sessions))).not.toContain(token);
  });

  it("ends the session that the cookie held before", async () => {
    const before = await signInAs(gate, lab.people.analyst.id, lab.lab.id);
    await trySignIn({ email: EMAIL, password: PASSWORD }, { cookie: before });
    const args = visit(lab, gate, "/", {}, { cookie: before });
    expect(await findPerson(args.request, args.context)).toBeNull();
  });

  it("never goes on to another site", async () => {
    for (const to of ["//other.example", "https://other.example", "/\\other.example"]) {
      const answer = await trySignIn({ email: EMAIL, password: PASSWORD }, { to });
      expect(answer.headers.get("Location"), to).toBe("/");
    }
  });

  it("says in each field what is missing, and keeps what was typed", async () => {
    const empty = await trySignIn({ email: "", password: "" });
    expect(empty.status).toBe(400);
    expect(empty.data?.errors).toEqual({
      email: "Type your e-mail address.",
      password: "Type your password.",
    });
    const half = await trySignIn({ email: "ada at lab", password: PASSWORD });
    expect(half.data?.errors.email).toMatch(/does not look like an e-mail address/);
    expect(half.data?.errors.password).toBeUndefined();
    expect(half.data?.email).toBe("ada at lab");
    expect(await kinds()).toEqual([]);
  });

  it("answers alike for a wrong password and an unknown address, and keeps the address from the events", async () => {
    const wrong = await trySignIn({ email: EMAIL, password: "another password" });
    const unknown = await trySignIn({ email: "nobody@lab.example", password: "another password" });
    expect(wrong.status).toBe(401);
    expect({ status: unknown.status, errors: unknown.data?.errors }).toEqual({
      status: wrong.status,
      errors: wrong.data?.errors,
    });
    expect(await kinds()).toEqual(["person.sign_in_refused", "person.sign_in_refused"]);
    const rows = await lab.store.db.select().from(events);
    expect(JSON.stringify(rows)).not.toMatch(/nobody|@/);
    expect(rows[0]?.objectId).toBe(lab.people.biomechanist.id);
    expect(rows[1]?.objectId).toMatch(/^[0-9a-f]{64}$/);
  });

  it("takes as long for an unknown address as for a wrong password", async () => {
    const timeMs = async (email: string, remoteAddress: string) => {
      const startedMs = performance.now();
      await trySignIn({ email, password: "another password" }, { remoteAddress });
      return performance.now() - startedMs;
    };
    const median = (values: number[]) => values.sort((a, b) => a - b)[values.length >> 1] ?? 0;
    const times: { known: number[]; unknown: number[] } = { known: [], unknown: [] };
    // In turns, so that a busy machine slows both.
    for (let n = 0; n < 15; n++) {
      times.known.push(await timeMs(EMAIL, `192.0.2.${n}`));
      times.unknown.push(await timeMs("nobody@lab.example", `192.0.2.${n}`));
    }
    const known = median(times.known);
    const unknown = median(times.unknown);
    // Without the comparison with nobody's password the unknown address takes a tenth of the time.
    expect(unknown / known).toBeGreaterThan(0.4);
    expect(unknown / known).toBeLessThan(2.5);
  });

  it("stops tries on one account from one address after five, says how long to wait, and then lets in", async () => {
    vi.useFakeTimers({ toFake: ["Date", "setTimeout", "clearTimeout"] });
    const form = { email: EMAIL, password: "another password" };
    for (let n = 0; n < 5; n++) expect((await trySignIn(form)).status).toBe(401);
    const stopped = await trySignIn({ ...form, password: PASSWORD });
    expect(stopped.status).toBe(429);
    expect(stopped.data?.errors.form).toBe(
      "Too many tries with this address. Wait 15 minutes, then try again.",
    );
    expect(stopped.headers.get("Retry-After")).toBe("900");
    // From elsewhere the person still gets in.
    const elsewhere = await trySignIn(
      { ...form, password: PASSWORD },
      { remoteAddress: "198.51.100.7" },
    );
    expect(elsewhere.status).toBe(302);
    vi.advanceTimersByTime(900_001);
    expect((await trySignIn({ ...form, password: PASSWORD })).status).toBe(302);
  });

  it("stops tries on one account from many addresses", async () => {
    const form = { email: EMAIL, password: "another password" };
    const statuses: number[] = [];
    for (let n = 0; n < 31; n++) {
      statuses.push((await trySignIn(form, { remoteAddress: `192.0.2.${n}` })).status);
    }
    expect(statuses.slice(0, 30).every((status) => status === 401)).toBe(true);
    expect(statuses[30]).toBe(429);
  });

  it("stops tries on many accounts from one address", async () => {
    const statuses: number[] = [];
    for (let n = 0; n < 61; n++) {
      const answer = await trySignIn({ email: `p${n}@lab.example`, password: "another password" });
      statuses.push(answer.status);
    }
    expect(statuses.slice(0, 60).every((status) => status === 401)).toBe(true);
    expect(statuses[60]).toBe(429);
  });

  it("does not count tries that succeed", async () => {
    for (let n = 0; n < 12; n++) {
      expect((await trySignIn({ email: EMAIL, password: PASSWORD })).status).toBe(302);
    }
  });

  it("says on the page that the demo has no second factor, and only there", async () => {
    const page = await signIn.loader(visit(lab, gate, "/sign-in", {}));
    expect(page.isSecondFactorOff).toBe(false);
    const demo = await signIn.loader(visit(lab, await openTestGate(lab, true), "/sign-in", {}));
    expect(demo.isSecondFactorOff).toBe(true);
  });

  it("sends a person who is signed in on from the page", async () => {
    const cookie = await signInAs(gate, lab.people.analyst.id, lab.lab.id);
    const asking = signIn.loader(visit(lab, gate, "/sign-in?to=/reviews", {}, { cookie }));
    expect((await refusalOf(asking)).headers.get("Location")).toBe("/reviews");
  });
});

describe("a session", () => {
  const isOpen = async (cookie: string) => {
    const args = visit(lab, gate, "/", {}, { cookie });
    return (await findPerson(args.request, args.context)) !== null;
  };

  it("ends twelve hours after it was last used, and use keeps it open", async () => {
    const cookie = await signInAs(gate, lab.people.analyst.id, lab.lab.id);
    lab.desk.clock.advance(11 * HOUR_MS);
    expect(await isOpen(cookie)).toBe(true);
    lab.desk.clock.advance(11 * HOUR_MS);
    expect(await isOpen(cookie)).toBe(true);
    lab.desk.clock.advance(12 * HOUR_MS);
    expect(await isOpen(cookie)).toBe(false);
  });

  it("ends after seven days however much it is used", async () => {
    const cookie = await signInAs(gate, lab.people.analyst.id, lab.lab.id);
    for (let hours = 0; hours < 7 * 24 - 8; hours += 8) {
      lab.desk.clock.advance(8 * HOUR_MS);
      expect(await isOpen(cookie)).toBe(true);
    }
    lab.desk.clock.advance(8 * HOUR_MS);
    expect(await isOpen(cookie)).toBe(false);
  });

  it("is not opened by a cookie that was altered or made up", async () => {
    const cookie = await signInAs(gate, lab.people.analyst.id, lab.lab.id);
    expect(await isOpen(`${cookie}x`)).toBe(false);
    expect(await isOpen("ogee=made-up")).toBe(false);
    const other = await openTestGate(lab);
    expect(await isOpen(await signInAs(other, lab.people.analyst.id, lab.lab.id))).toBe(true);
  });

  it("is ended by signing out, for a copy of the cookie too", async () => {
    const cookie = await signInAs(gate, lab.people.analyst.id, lab.lab.id);
    const answer = await signOut.action(visit(lab, gate, "/sign-out", {}, { cookie, form: {} }));
    expect(answer.headers.get("Location")).toBe("/sign-in");
    expect(answer.headers.get("Set-Cookie")).toMatch(/^ogee=;.*Max-Age=0|Expires=Thu, 01 Jan 1970/);
    expect(await isOpen(cookie)).toBe(false);
    expect(await kinds()).toEqual(["person.signed_in", "person.signed_out"]);
  });

  it("is not ended by an address that somebody else made us open", async () => {
    const cookie = await signInAs(gate, lab.people.analyst.id, lab.lab.id);
    await signOut.loader();
    expect(await isOpen(cookie)).toBe(true);
  });
});

describe("who may", () => {
  const ask = (cookie: string | undefined, path: string, headers: Record<string, string> = {}) =>
    visit(lab, gate, path, {}, { ...(cookie === undefined ? {} : { cookie }), headers });

  it("leads a stranger through the sign-in page and back", async () => {
    const cases: [string, string][] = [
      ["/", "/sign-in"],
      ["/studies", "/sign-in?to=%2Fstudies"],
      ["/studies/s?x=1", "/sign-in?to=%2Fstudies%2Fs%3Fx%3D1"],
      ["/_root.data", "/sign-in"],
      ["/studies/s.data?_routes=root&x=1", "/sign-in?to=%2Fstudies%2Fs%3Fx%3D1"],
      ["/studies/_.data", "/sign-in?to=%2Fstudies"],
    ];
    for (const [path, location] of cases) {
      const { request, context } = ask(undefined, path);
      const answer = await refusalOf(requireActor(request, context));
      expect([answer.status, answer.headers.get("Location")], path).toEqual([302, location]);
    }
  });

  it("tells a script of ours that the person is signed out", async () => {
    const { request, context } = ask(undefined, "/recordings/r/raw", { "Sec-Fetch-Dest": "empty" });
    const answer = await refusalOf(requirePerson(request, context));
    expect(answer.status).toBe(401);
    expect(await answer.text()).toMatch(/signed out/);
  });

  it("lets each role do what is among its abilities, and says to whom the rest belongs", async () => {
    const cookie = await signInAs(gate, lab.people.analyst.id, lab.lab.id);
    const allowed = ask(cookie, "/comparisons/c");
    await expect(requireActor(allowed.request, allowed.context, "compare")).resolves.toBeDefined();
    const { request, context } = ask(cookie, "/studies/s/set-up");
    const answer = await refusalOf(requireActor(request, context, "set_up_study"));
    expect(answer.status).toBe(403);
    expect(await answer.text()).toBe(
      "This is for the role biomechanist or manager in Movement room; you hold analyst there. " +
        "The lab's manager can give you the role.",
    );
  });

  it("leads a person without a chosen lab, and one whose membership ended, to the choice", async () => {
    const none = await signInAs(gate, lab.people.analyst.id, null);
    const ended = await signInAs(gate, lab.people.reviewer.id, lab.lab.id);
    await lab.store.write((tx) =>
      tx
        .update(memberships)
        .set({ endedAt: lab.desk.clock.now() })
        .where(eq(memberships.personId, lab.people.reviewer.id)),
    );
    for (const cookie of [none, ended]) {
      const { request, context } = ask(cookie, "/reviews");
      const answer = await refusalOf(requireActor(request, context));
      expect(answer.headers.get("Location")).toBe("/choose-lab?to=%2Freviews");
    }
  });
});

describe("choosing a lab", () => {
  beforeEach(async () => {
    await lab.store.write((tx) =>
      insertMembership(tx, {
        id: "second",
        labId: lab.otherLab.id,
        personId: lab.people.biomechanist.id,
        roles: ["analyst", "reviewer"],
        createdAt: 1,
      }),
    );
  });

  it("is asked of who is in several labs, and carries on to where they were going", async () => {
    const answer = await trySignIn({ email: EMAIL, password: PASSWORD }, { to: "/studies" });
    expect(answer.headers.get("Location")).toBe("/choose-lab?to=%2Fstudies");
    const cookie = cookieOf(answer.headers.get("Set-Cookie"));
    const page = await chooseLab.loader(visit(lab, gate, "/choose-lab", {}, { cookie }));
    expect(page.labs.map(({ name, roles }) => [name, roles])).toEqual([
      ["Movement room", ["biomechanist"]],
      ["Other room", ["analyst", "reviewer"]],
    ]);
    const form = { lab: lab.otherLab.id };
    const chosen = await chooseLab.action(
      visit(lab, gate, "/choose-lab?to=/studies", {}, { cookie, form }),
    );
    expect(chosen).toBeInstanceOf(Response);
    expect(chosen instanceof Response && chosen.headers.get("Location")).toBe("/studies");
    const args = visit(lab, gate, "/studies", {}, { cookie });
    const { actor } = await requireActor(args.request, args.context);
    expect(actor).toEqual({
      personId: lab.people.biomechanist.id,
      labId: lab.otherLab.id,
      roles: ["analyst", "reviewer"],
    });
    expect(await kinds()).toEqual(["person.signed_in", "person.lab_chosen"]);
  });

  it("refuses a lab that the person is not in as if there were none", async () => {
    const cookie = await signInAs(gate, lab.people.analyst.id, lab.lab.id);
    for (const id of [lab.otherLab.id, "no-such-lab"]) {
      const asking = chooseLab.action(
        visit(lab, gate, "/choose-lab", {}, { cookie, form: { lab: id } }),
      );
      expect((await refusalOf(asking)).status).toBe(404);
    }
  });
});
