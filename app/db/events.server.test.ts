import { createHash } from "node:crypto";
import { sql } from "drizzle-orm";
import { afterEach, beforeEach, describe, expect, it } from "vitest";
import { openTestLab, type TestLab } from "../../tests/support/lab.ts";
import {
  findLastEvent,
  listEvents,
  type NewEvent,
  recordEvent,
  verifyChain,
} from "./events.server.ts";

let test: TestLab;

beforeEach(async () => {
  test = await openTestLab();
});
afterEach(() => test.close());

function event(change: Partial<NewEvent> = {}): NewEvent {
  return {
    at: test.desk.clock.now(),
    labId: test.lab.id,
    personId: test.people.biomechanist.id,
    kind: "fit.saved",
    objectType: "fit",
    objectId: "fit-1",
    ...change,
  };
}
const record = (change: Partial<NewEvent> = {}) =>
  test.store.write((tx) => recordEvent(tx, event(change)));
const tamper = (statement: ReturnType<typeof sql>) =>
  test.store.write(async (tx) => {
    // Somebody with the file in their hands can drop the triggers.
    await tx.run(sql`drop trigger events_refuse_update`);
    await tx.run(sql`drop trigger events_refuse_delete`);
    await tx.run(statement);
  });

describe("events", () => {
  it("hash the row before and their own values, keys of the detail in code-unit order", async () => {
    await record({ detail: { b: 1, a: { d: [true, null], c: "å" } } });
    const [row] = await listEvents(test.store.db, test.lab.id);
    expect(row?.detail).toBe('{"a":{"c":"å","d":[true,null]},"b":1}');
    const text = JSON.stringify([
      "0".repeat(64),
      Date.UTC(2026, 11, 1, 9),
      "lab-one",
      "person-biomechanist",
      "fit.saved",
      "fit",
      "fit-1",
      '{"a":{"c":"å","d":[true,null]},"b":1}',
    ]);
    expect(row?.hash).toBe(createHash("sha256").update(text).digest("hex"));
  });

  it("stay whole under many writers at once", async () => {
    await Promise.all(Array.from({ length: 30 }, (_, n) => record({ detail: { n } })));
    expect(await verifyChain(test.store.db)).toEqual({ status: "whole", events: 30 });
  });

  it("go with the change that they tell of when it is undone", async () => {
    const failing = test.store.write(async (tx) => {
      await recordEvent(tx, event());
      throw new Error("undone");
    });
    await expect(failing).rejects.toThrow("undone");
    await record();
    expect(await verifyChain(test.store.db)).toEqual({ status: "whole", events: 1 });
  });

  it("are refused to whoever would change or delete them", async () => {
    await record();
    const run = (statement: ReturnType<typeof sql>) => test.store.write((tx) => tx.run(statement));
    await expect(run(sql`update events set kind = 'x'`)).rejects.toThrow();
    await expect(run(sql`delete from events`)).rejects.toThrow();
    expect(await listEvents(test.store.db, test.lab.id)).toHaveLength(1);
  });

  it.each([
    ["changed", sql`update events set detail = '{"n":9}' where sequence = 2`, 2],
    ["given to another person", sql`update events set person_id = null where sequence = 2`, 2],
    ["moved in time", sql`update events set at = at + 1 where sequence = 3`, 3],
    ["taken out", sql`delete from events where sequence = 2`, 3],
    [
      "put in",
      sql`insert into events (at, kind, object_type, object_id, detail, hash) values (1, 'x', 'x', 'x', '{}', 'x')`,
      4,
    ],
  ])("break the chain where a row was %s", async (_what, statement, sequence) => {
    for (const n of [1, 2, 3]) await record({ detail: { n } });
    await tamper(statement);
    expect(await verifyChain(test.store.db)).toMatchObject({ status: "broken", sequence });
  });

  it("are listed for one lab, the newest first, page by page", async () => {
    for (const n of [1, 2, 3]) await record({ detail: { n }, objectId: `fit-${n}` });
    await record({ labId: test.otherLab.id });
    const first = await listEvents(test.store.db, test.lab.id, { limit: 2 });
    expect(first.map((row) => row.objectId)).toEqual(["fit-3", "fit-2"]);
    const before = first.at(-1)?.sequence ?? 0;
    const second = await listEvents(test.store.db, test.lab.id, { limit: 2, before });
    expect(second.map((row) => row.objectId)).toEqual(["fit-1"]);
    const one = await listEvents(test.store.db, test.lab.id, {
      objectType: "fit",
      objectId: "fit-2",
    });
    expect(one).toHaveLength(1);
  });

  it("tell when a person last did something to an object", async () => {
    await record({ kind: "fit.residuals_opened" });
    test.desk.clock.advance(1000);
    await record({ kind: "fit.residuals_opened" });
    const match = {
      personId: test.people.biomechanist.id,
      kind: "fit.residuals_opened",
      objectType: "fit",
      objectId: "fit-1",
    };
    expect((await findLastEvent(test.store.db, match))?.at).toBe(test.desk.clock.now());
    const other = { ...match, personId: test.people.reviewer.id };
    expect(await findLastEvent(test.store.db, other)).toBeNull();
  });
});
