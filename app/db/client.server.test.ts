import { spawn } from "node:child_process";
import { once } from "node:events";
import { copyFileSync, mkdtempSync, readdirSync, readFileSync, rmSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { generateSQLiteDrizzleJson, generateSQLiteMigration } from "drizzle-kit/api";
import { eq, sql } from "drizzle-orm";
import { afterEach, beforeEach, describe, expect, it } from "vitest";
import { openStore, type Store, violatedConstraint } from "./client.server.ts";
import { verifyChain } from "./events.server.ts";
import * as schema from "./schema.ts";
import { labs, memberships } from "./schema.ts";

const root = join(import.meta.dirname, "..", "..");

let folder: string;
let url: string;
let store: Store;

beforeEach(async () => {
  folder = mkdtempSync(join(tmpdir(), "ogee-store-"));
  url = `file:${join(folder, "ogee.db")}`;
  store = await openStore(url);
});

afterEach(() => {
  store.close();
  rmSync(folder, { recursive: true, force: true });
});

const createdAt = 1;

describe("store", () => {
  it("keeps a write-ahead journal and holds foreign keys", async () => {
    expect(await store.db.get(sql`pragma journal_mode`)).toEqual({ journal_mode: "wal" });
    const stray = store.write((tx) =>
      tx.insert(memberships).values({ id: "m", labId: "none", personId: "none", createdAt }),
    );
    await expect(stray).rejects.toSatisfy((error) => violatedConstraint(error) === "foreign_key");
  });

  it("names the constraint that a failed write met, and none for another failure", async () => {
    const insert = () =>
      store.write((tx) => tx.insert(labs).values({ id: "a", name: "A", createdAt }));
    await insert();
    await expect(insert()).rejects.toSatisfy((error) => violatedConstraint(error) === "unique");
    expect(violatedConstraint(new Error("another"))).toBeNull();
  });

  it("lets many writers in one after the other, each seeing what the one before it wrote", async () => {
    await store.write((tx) => tx.insert(labs).values({ id: "a", name: "0", createdAt }));
    await Promise.all(
      Array.from({ length: 100 }, () =>
        store.write(async (tx) => {
          const [row] = await tx.select().from(labs).where(eq(labs.id, "a"));
          await tx
            .update(labs)
            .set({ name: String(Number(row?.name) + 1) })
            .where(eq(labs.id, "a"));
        }),
      ),
    );
    expect(await store.db.select({ name: labs.name }).from(labs)).toEqual([{ name: "100" }]);
  });

  it("undoes all of a write that throws, and goes on with the next", async () => {
    const failing = store.write(async (tx) => {
      await tx.insert(labs).values({ id: "a", name: "A", createdAt });
      throw new Error("half-way");
    });
    const next = store.write((tx) =>
      tx.insert(labs).values({ id: "b", name: "B", createdAt }).returning({ id: labs.id }),
    );
    await expect(failing).rejects.toThrow("half-way");
    expect(await next).toEqual([{ id: "b" }]);
    expect(await store.db.select({ id: labs.id }).from(labs)).toEqual([{ id: "b" }]);
  });

  it("refuses a write inside a write, which would wait for itself", async () => {
    const nested = store.write(() => store.write(async () => undefined));
    await expect(nested).rejects.toThrow("A write inside a write");
    expect(await store.write(async () => "open again")).toBe("open again");
  });

  it("takes turns with another process", async () => {
    const count = 20;
    const script = `
      import { openStore } from "#app/db/client.server.ts";
      import { labs } from "#app/db/schema.ts";
      const store = await openStore(${JSON.stringify(url)});
      console.log("open");
      for (let n = 0; n < ${count}; n++) {
        await store.write((tx) => tx.insert(labs).values({ id: "theirs-" + n, name: "T", createdAt: 1 }));
      }
      store.close();`;
    const other = spawn(
      process.execPath,
      ["--import", "tsx", "--input-type=module", "--eval", script],
      { cwd: root, stdio: ["ignore", "pipe", "inherit"] },
    );
    const ended = once(other, "exit");
    await once(other.stdout, "data");
    for (let n = 0; n < count; n++) {
      await store.write((tx) => tx.insert(labs).values({ id: `ours-${n}`, name: "O", createdAt }));
    }
    expect(await ended).toEqual([0, null]);
    expect(await store.db.$count(labs)).toBe(2 * count);
  }, 30_000);

  it("opens what it made before, with its rows", async () => {
    await store.write((tx) => tx.insert(labs).values({ id: "a", name: "A", createdAt }));
    store.close();
    store = await openStore(url);
    expect(await store.db.$count(labs)).toBe(1);
  });

  it("refuses to change a protocol version, or what a saved fit holds", async () => {
    store.close();
    copyFirstDatabase();
    store = await openStore(url);
    const change = (statement: ReturnType<typeof sql>) => store.write((tx) => tx.run(statement));
    await expect(change(sql`update protocols set choices = '{"a":1}'`)).rejects.toThrow();
    await expect(change(sql`update fits set result = '{"a":1}'`)).rejects.toThrow();
    await expect(change(sql`update fits set state = 'returned'`)).resolves.toBeDefined();
  });
});

describe("migrations", () => {
  it("are those of the tables as they stand: generating again would change nothing", async () => {
    const meta = join(root, "drizzle", "meta");
    const last = readdirSync(meta)
      .filter((name) => name.endsWith("_snapshot.json"))
      .sort()
      .at(-1);
    const snapshot = JSON.parse(readFileSync(join(meta, last ?? ""), "utf8"));
    const now = await generateSQLiteDrizzleJson(schema, snapshot.id);
    expect(await generateSQLiteMigration(snapshot, now)).toEqual([]);
  });

  it("bring a database of the first version up to today with every row whole", async () => {
    store.close();
    copyFirstDatabase();
    store = await openStore(url);
    const first = join(root, "fixtures", "database-0", "rows.json");
    const tables: Record<string, Record<string, unknown>[]> = JSON.parse(
      readFileSync(first, "utf8"),
    );
    for (const [table, rows] of Object.entries(tables)) {
      const found = await store.db.all(sql`select * from ${sql.identifier(table)} order by rowid`);
      expect(found, table).toMatchObject(rows);
      expect(found, table).toHaveLength(rows.length);
    }
    expect(await verifyChain(store.db)).toEqual({ status: "whole", events: 3 });
  });

  it("covered every table of the first version by that check", async () => {
    const rows = JSON.parse(
      readFileSync(join(root, "fixtures", "database-0", "rows.json"), "utf8"),
    );
    const initial = readFileSync(join(root, "drizzle", "0000_start.sql"), "utf8");
    const made = [...initial.matchAll(/CREATE TABLE `(\w+)`/g)].map(([, name]) => name);
    expect(Object.keys(rows).sort()).toEqual(made.sort());
  });
});

function copyFirstDatabase(): void {
  for (const end of ["", "-wal", "-shm"]) rmSync(join(folder, `ogee.db${end}`), { force: true });
  copyFileSync(join(root, "fixtures", "database-0", "ogee.db"), join(folder, "ogee.db"));
}
