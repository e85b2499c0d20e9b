import { mkdtempSync, rmSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { sql } from "drizzle-orm";
import { afterEach, beforeEach, describe, expect, it } from "vitest";
import { openDesk } from "#app/auth/desk.server.ts";
import type { Store } from "#app/db/client.server.ts";
import { recordEvent } from "#app/db/events.server.ts";
import { readEnv } from "#app/env.server.ts";
import { runScript } from "../support/run-script.ts";

let folder: string;
beforeEach(() => {
  folder = mkdtempSync(join(tmpdir(), "ogee-events-"));
});
afterEach(() => rmSync(folder, { recursive: true, force: true }));

const verify = () => runScript("scripts/events-verify.ts", [], { env: { OGEE_DATA: folder } });

/** An installation where three things happened, and then what `change` does to it. */
async function installation(change: (store: Store) => Promise<unknown> = async () => {}) {
  const { store } = await openDesk(readEnv({ OGEE_DATA: folder }));
  for (const at of [1, 2, 3]) {
    await store.write((tx) =>
      recordEvent(tx, {
        at,
        labId: null,
        personId: null,
        kind: "person.sign_in_refused",
        objectType: "unknown_address",
        objectId: `address-${at}`,
      }),
    );
  }
  await change(store);
  store.close();
}

describe("npm run events:verify", () => {
  it("counts the events of a whole chain", async () => {
    await installation();
    expect(await verify()).toEqual({ code: 0, said: "3 events, chain whole\n" });
  }, 60_000);

  it("says where a chain breaks that was changed past the database's own refusal", async () => {
    await installation(async ({ db }) => {
      await db.run(sql`drop trigger events_refuse_update`);
      await db.run(sql`update events set object_id = 'another' where sequence = 2`);
    });
    const { code, said } = await verify();
    expect(code).toBe(1);
    expect(said.trimEnd().split("\n").at(-1)).toBe(
      "Event 2 does not follow from what stands before it: one of the two was changed, taken out or put in. Events before it that hold: 1.",
    );
  }, 60_000);

  it("does not take an installation that is not there for a whole one", async () => {
    const { code, said } = await verify();
    expect(code).toBe(1);
    expect(said).toMatch(/^There is no database at .*ogee\.db: set OGEE_DATA or DATABASE_URL/);
  }, 60_000);
});
