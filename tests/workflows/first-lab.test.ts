import { mkdtempSync, rmSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { afterEach, beforeEach, describe, expect, it } from "vitest";
import { openDesk } from "#app/auth/desk.server.ts";
import { verifyPassword } from "#app/auth/password.server.ts";
import { verifyChain } from "#app/db/events.server.ts";
import { findPersonByEmail, listMemberships } from "#app/db/people.server.ts";
import { events, labs, people } from "#app/db/schema.ts";
import { readEnv } from "#app/env.server.ts";
import { runScript } from "../support/run-script.ts";

const PASSWORD = "three words and a comma,";
const ADA = ["--lab", "Movement room", "--name", "Ada Berg", "--email", "Ada@Lab.example"];

let folder: string;

beforeEach(() => {
  folder = mkdtempSync(join(tmpdir(), "ogee-first-lab-"));
});
afterEach(() => rmSync(folder, { recursive: true, force: true }));

const run = (args: string[], options: { input?: string; env?: Record<string, string> } = {}) =>
  runScript("scripts/first-lab.ts", args, {
    ...options,
    env: { OGEE_DATA: folder, ...options.env },
  });

describe("npm run first-lab", () => {
  it("makes the lab and its manager, whose password is only a hash and in no event", async () => {
    const { code, said } = await run([...ADA, "--roles", "manager,biomechanist"], {
      input: `${PASSWORD}\n`,
    });
    expect([code, said]).toEqual([
      0,
      "The lab “Movement room” is made; ada@lab.example is its manager.\n",
    ]);
    const { store } = await openDesk(readEnv({ OGEE_DATA: folder }));
    const person = await findPersonByEmail(store.db, "ada@lab.example");
    expect(person?.passwordHash).toMatch(/^\$argon2id\$v=19\$m=19456,t=2,p=1\$/);
    expect(await verifyPassword(person?.passwordHash ?? "", PASSWORD)).toBe(true);
    expect(await listMemberships(store.db, person?.id ?? "")).toMatchObject([
      { lab: { name: "Movement room" }, roles: ["biomechanist", "manager"] },
    ]);
    expect(await verifyChain(store.db)).toEqual({ status: "whole", events: 3 });
    expect(JSON.stringify(await store.db.select().from(events))).not.toMatch(/comma|argon2/);
    store.close();
  }, 60_000);

  it("refuses a lab of a name that is there, and lets a known person keep their password", async () => {
    await run(ADA, { env: { OGEE_PASSWORD: PASSWORD } });
    const again = await run(ADA, { input: PASSWORD });
    expect(again.code).toBe(1);
    expect(again.said).toBe("There is a lab named “Movement room” already. Choose another name.\n");

    const other = ["--lab", "Other room", ...ADA.slice(2)];
    const second = await run(other, { input: "another password entirely" });
    expect(second.code).toBe(0);
    expect(second.said).toMatch(/keeps its own password/);
    const { store } = await openDesk(readEnv({ OGEE_DATA: folder }));
    expect(await store.db.$count(labs)).toBe(2);
    expect(await store.db.$count(people)).toBe(1);
    const person = await findPersonByEmail(store.db, "ada@lab.example");
    expect(await verifyPassword(person?.passwordHash ?? "", PASSWORD)).toBe(true);
    store.close();
  }, 60_000);

  it.each([
    [["--lab", "A", "--name", "B"], PASSWORD, /^--email is missing\.\n\nnpm run first-lab/],
    [[...ADA, "--roles", "analyst"], PASSWORD, /--roles must name manager/],
    [ADA, "short", /^A password has at least 12 characters\./],
    [[...ADA, "--password", PASSWORD], PASSWORD, /Unknown option '--password'/],
  ])(
    "says what is wrong with %j and makes nothing",
    async (args, input, sentence) => {
      const { code, said } = await run(args, { input });
      expect(code).toBe(1);
      expect(said).toMatch(sentence);
      expect(said).not.toMatch(/\n {4}at /);
    },
    30_000,
  );
});
