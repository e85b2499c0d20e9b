/**
 * Every address × every role, a stranger, and a member of another lab. The list of addresses is read
 * from the application; one that the table below does not name fails.
 */
import type { RouteConfigEntry } from "@react-router/dev/routes";
import { afterAll, beforeAll, describe, expect, it } from "vitest";
import type { Gate } from "#app/auth/gate.server.ts";
import { type Ability, may, ROLES, type Role } from "#app/domain/role.ts";
import routes from "#app/routes.ts";
import { background } from "#app/workflows/background.server.ts";
import { type StoreFit, storeFit } from "#app/workflows/store-fit.server.ts";
import { openTestLab, type TestLab } from "../support/lab.ts";
import {
  fitOf,
  placeOf,
  readyRecording,
  recordingBytes,
  setUpStudy,
  upload,
} from "../support/study.ts";
import { openTestGate, signInAs, visit } from "../support/visit.ts";

/** Who may: nobody; everyone; whoever is signed in; members of the lab with this ability. */
type Who = "nobody" | "everyone" | "person" | Ability;

interface Request {
  who: Who;
  /** What is posted, complete enough to reach the object that it is about. */
  form?: Record<string, string>;
  /** @param id  the object's, or one that does not exist */
  json?: (id: string) => unknown;
  /** Names the request where an address takes several. */
  what?: string;
}

/** The address as in `app/routes.ts` → whom its loader and its action answer. */
const TABLE: Record<string, { read?: Who; change?: Request[] }> = {
  "/sign-in": {
    read: "everyone",
    change: [{ who: "everyone", form: { email: "nobody@lab.example", password: "x" } }],
  },
  "/sign-out": { read: "everyone", change: [{ who: "everyone", form: {} }] },
  "/choose-lab": { read: "person", change: [{ who: "person", form: {} }] },
  "/preferences": { read: "nobody", change: [{ who: "everyone", form: { theme: "day" } }] },
  "/health": { read: "everyone" },
  "/ready": { read: "everyone" },
  "/": { read: "read" },
  "/studies": { read: "read" },
  "/studies/new": { read: "set_up_study", change: [{ who: "set_up_study", form: {} }] },
  "/studies/:id": { read: "read" },
  "/studies/:id/set-up": {
    read: "set_up_study",
    change: [{ who: "set_up_study", form: { form: "posture", name: "", version: "1" } }],
  },
  "/studies/:id/recordings": { read: "read" },
  "/studies/:id/protocols": { read: "read", change: [{ who: "set_up_study", form: {} }] },
  "/studies/:id/take-in": { read: "take_in" },
  "/recordings/:id": {
    read: "read",
    change: [
      { what: "save", who: "fit", json: () => ({ intent: "save", ...fit }) },
      {
        what: "submit",
        who: "submit",
        json: (id) => ({ intent: "submit", fitId: fitIdFor(id), version: 1 }),
      },
    ],
  },
  "/fits/:id": {
    read: "read",
    change: [
      { what: "submit", who: "submit", json: () => ({ intent: "submit", version: 1 }) },
      { what: "open", who: "review", json: () => ({ intent: "open_residuals" }) },
      { what: "approve", who: "review", json: () => decide("approved") },
      { what: "return", who: "review", json: () => decide("returned") },
    ],
  },
  "/reviews": { read: "read" },
  "/studies/:id/uploads": {
    read: "take_in",
    change: [
      {
        who: "take_in",
        json: () => ({ fileName: "W02_on.csv", sizeBytes: 9, sha256: "0".repeat(64) }),
      },
    ],
  },
  "/uploads/:id/finish": {
    read: "take_in",
    change: [{ who: "take_in", json: () => finish }],
  },
  "/uploads/:id/cancel": { change: [{ who: "take_in", form: {} }] },
  "/recordings/:id/raw": { read: "read" },
  "/fits/:id/:document": { read: "download" },
};

/** What no other lab may know to exist; the part of an address that stands for it. */
const OBJECTS: Record<string, string> = {};
/** What the recording's page sends to save a fit, without the recording's id. */
let fit: Omit<StoreFit, "recordingId">;
/** What the take-in page sends when all parts are there. */
let finish: unknown;

function decide(decision: "approved" | "returned"): unknown {
  return { intent: "decide", version: 1, decision, note: "Window 3 starts early." };
}

function fitIdFor(recordingId: string): string {
  return recordingId === OBJECTS.recordings ? (OBJECTS.fits ?? "") : recordingId;
}

interface RouteModule {
  loader?: (args: unknown) => unknown;
  action?: (args: unknown) => unknown;
  default?: unknown;
}
const modules = import.meta.glob<RouteModule>("../../app/routes/**/*.{ts,tsx}");

/** Every address with the file that answers it; the layout stands round pages and asks by itself. */
function addressesOf(entries: readonly RouteConfigEntry[], parent = ""): Map<string, string> {
  const found = new Map<string, string>();
  for (const { path, file, children, index } of entries) {
    const address = path === undefined ? parent : `${parent}/${path}`;
    if (children) {
      for (const [inner, innerFile] of addressesOf(children, address)) found.set(inner, innerFile);
    } else if (path !== undefined || index) found.set(address || "/", file);
  }
  return found;
}

interface Answer {
  status: number;
  location: string | null;
  text: string;
}

async function answerOf(asking: () => unknown): Promise<Answer> {
  let answer: unknown;
  try {
    answer = await asking();
  } catch (thrown) {
    answer = thrown;
    if (!(thrown instanceof Response)) throw thrown;
  }
  if (answer instanceof Response) {
    const location = answer.headers.get("Location");
    return { status: answer.status, location, text: await answer.text() };
  }
  const init = answer && typeof answer === "object" && "init" in answer ? answer.init : null;
  const status = init && typeof init === "object" && "status" in init ? Number(init.status) : 200;
  return { status, location: null, text: "" };
}

const addresses = addressesOf(await routes);
let lab: TestLab;
let gate: Gate;

beforeAll(async () => {
  // Reading every route's file takes its time once.
  await Promise.all(Object.values(modules).map((load) => load()));
  lab = await openTestLab();
  gate = await openTestGate(lab);
  const study = await setUpStudy(lab);
  const recordingId = await readyRecording(lab, study);
  const { recordingId: _, ...found } = await fitOf(lab, recordingId);
  fit = found;
  const stored = await storeFit(lab.desk, lab.actor("biomechanist"), { recordingId, ...fit });
  if (stored.status !== "saved") throw new Error(`The fit is ${stored.status}.`);
  await background.settled();
  const file = { bytes: recordingBytes({ K: 3, B: 0.05, I: 0.004 }), condition: 1 };
  const { uploadId, parts } = await upload(lab, study, file);
  finish = { parts, ...placeOf(study, file) };
  Object.assign(OBJECTS, {
    studies: study.studyId,
    recordings: recordingId,
    fits: stored.fitId,
    uploads: uploadId,
  });
}, 120_000);

afterAll(async () => {
  await background.settled();
  lab.close();
});

/** `outsider` holds all four roles in another lab. */
type Asker = Role | "stranger" | "outsider";

async function signIn(asker: Asker): Promise<{ cookie?: string }> {
  if (asker === "stranger") return {};
  const cookie =
    asker === "outsider"
      ? await signInAs(gate, lab.outsider.id, lab.otherLab.id)
      : await signInAs(gate, lab.people[asker].id, lab.lab.id);
  return { cookie };
}

/** Asks one address as somebody, with `id` in place of the object's own. */
async function ask(
  asker: Asker,
  address: string,
  request: Pick<Request, "form" | "json"> | null,
  id?: string,
): Promise<Answer> {
  const module = await modules[`../../app/${addresses.get(address)}`]?.();
  if (!module) throw new Error(`${address} has no file.`);
  const objectId = id ?? OBJECTS[address.split("/")[1] ?? ""] ?? "";
  const params = {
    ...(address.includes(":id") ? { id: objectId } : {}),
    ...(address.includes(":document") ? { document: "protocol.json" } : {}),
  };
  const path = address.replace(":id", objectId).replace(":document", "protocol.json");
  const isPage = module.default !== undefined;
  const handler = request === null ? module.loader : module.action;
  if (!handler) throw new Error(`${address} does not answer this.`);
  const cookie = await signIn(asker);
  return answerOf(() =>
    handler(
      visit(lab, gate, path, params, {
        ...cookie,
        ...(request?.form ? { form: request.form } : {}),
        ...(request?.json ? { json: request.json(objectId) } : {}),
        headers: { "Sec-Fetch-Dest": isPage ? "document" : "empty" },
      }),
    ),
  );
}

/** Let in, whatever comes of the request itself. */
function expectAnswered({ status, location, text }: Answer): void {
  expect([403, 404, 500], text).not.toContain(status);
  expect(location ?? "").not.toMatch(/^\/(sign-in\?|choose-lab)/);
  // What a stranger's wrong password is answered with too.
  if (status === 401) expect(text).not.toMatch(/signed out/);
}

describe("the table of addresses", () => {
  it("names every address of the application, and no other", () => {
    expect(Object.keys(TABLE).sort()).toEqual(
      [...addresses.keys()].filter((address) => address !== "/*").sort(),
    );
  });

  it("says who may read and who may change wherever an address does either", async () => {
    for (const [address, file] of addresses) {
      if (address === "/*") continue;
      const module = await modules[`../../app/${file}`]?.();
      const row = TABLE[address];
      expect(row?.read !== undefined, `${address} is read`).toBe(module?.loader !== undefined);
      expect(row?.change !== undefined, `${address} is changed`).toBe(module?.action !== undefined);
    }
  });
});

describe("an address that nothing answers", () => {
  it("leads a stranger to the sign-in page, and tells a member that there is nothing", async () => {
    const stranger = await ask("stranger", "/*", null);
    expect([stranger.status, stranger.location]).toEqual([302, "/sign-in?to=%2F*"]);
    expect((await ask("manager", "/*", null)).status).toBe(404);
  });
});

const requests = Object.entries(TABLE).flatMap(([address, { read, change = [] }]) => [
  ...(read === undefined ? [] : [{ address, who: read, verb: "read", request: null }]),
  ...change.map((request) => ({
    address,
    who: request.who,
    verb: request.what ? `change (${request.what})` : "change",
    request,
  })),
]);

describe.each(requests)("$verb $address", ({ address, who, request }) => {
  it("answers a stranger as it should", async () => {
    const answer = await ask("stranger", address, request);
    if (who === "everyone") expectAnswered(answer);
    else if (who === "nobody") expect(answer.status).toBe(404);
    else if (answer.status === 401) expect(answer.text).toMatch(/sign in/i);
    else expect([answer.status, answer.location?.split("?")[0]]).toEqual([302, "/sign-in"]);
  });
});

describe.each(requests.filter(({ address }) => address.includes(":id")))(
  "$verb $address",
  ({ address, who, request }) => {
    it("hides the object from another lab as if it were not there", async () => {
      const hidden = await ask("outsider", address, request);
      const absent = await ask("outsider", address, request, "no-such-object");
      expect(hidden.status).toBe(404);
      expect(hidden).toEqual(absent);
    });

    it("says that there is nothing where the object does not exist", async () => {
      const role = ROLES.find((each) => isAmong(who, each)) ?? "manager";
      const answer = await ask(role, address, request, "no-such-object");
      expect(answer.status).toBe(404);
    });
  },
);

// Last: what is let in here changes the objects.
describe.each(requests)("$verb $address", ({ address, who, request }) => {
  it.each(ROLES)("answers a %s as the lab's rules say", async (role) => {
    const answer = await ask(role, address, request);
    if (isAmong(who, role)) expectAnswered(answer);
    else expect(answer.status).toBe(who === "nobody" ? 404 : 403);
  });
});

function isAmong(who: Who, role: Role): boolean {
  if (who === "nobody") return false;
  return who === "everyone" || who === "person" || may({ roles: [role] }, who);
}
