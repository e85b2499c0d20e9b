import { mkdtempSync, rmSync, writeFileSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { afterEach, beforeEach, expect, it } from "vitest";
import { defaultChoices } from "#app/domain/protocol.ts";
import type { Protocol } from "#app/engine/types.ts";
import { createEngineThread, type EngineThread } from "./engine-thread.server.ts";

/** Answers bytes that begin with 0, fails on those with 1, and breaks off on those with 2. */
const SCRIPT = `
import { parentPort } from "node:worker_threads";
parentPort.on("message", ({ id, bytes }) => {
  if (bytes[0] === 0) parentPort.postMessage({ id, outcome: { status: "read", facts: { id } } });
  if (bytes[0] === 1) parentPort.postMessage({ id, error: "Error: the engine broke" });
  if (bytes[0] === 2) throw new Error("the thread broke");
});
`;

let folder: string;
let engine: EngineThread;
beforeEach(() => {
  folder = mkdtempSync(join(tmpdir(), "ogee-thread-"));
  writeFileSync(join(folder, "thread.mjs"), SCRIPT);
  engine = createEngineThread(join(folder, "thread.mjs"));
});
afterEach(async () => {
  await engine.close();
  rmSync(folder, { recursive: true, force: true });
});

// The script above looks at no protocol.
const protocol = defaultChoices as unknown as Protocol;
const read = (first: number) => engine.readFacts(new Uint8Array([first]), protocol);

it("says of what the engine breaks on that it failed, and goes on with the next", async () => {
  expect(await read(1)).toEqual({ status: "failed", reason: "Error: the engine broke" });
  expect((await read(0)).status).toBe("read");
});

it("rejects what a lost thread had not answered, and nothing of the thread after it", async () => {
  const lost = await Promise.allSettled([read(2), read(0)]);
  expect(lost.map(({ status }) => status)).toEqual(["rejected", "rejected"]);
  // The first thread's end is told after its error: by then the second one is at work.
  for (let n = 0; n < 3; n++) expect((await read(0)).status).toBe("read");
});

it("rejects what comes after it is closed", async () => {
  await read(0);
  await engine.close();
  await expect(read(0)).rejects.toThrow("The engine's thread is closed.");
});
