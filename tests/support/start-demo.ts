/**
 * Starts the demo in a folder of its own for the browser tests, and ends it after them. The lines
 * that it prints are what tests go by: address and one sign-in per role.
 */
import { spawn } from "node:child_process";
import { rmSync } from "node:fs";
import { join } from "node:path";
import { createInterface } from "node:readline";
import { findFreePort } from "../../scripts/demo/ports.ts";

const root = join(import.meta.dirname, "..", "..");
const READY_WITHIN_MS = 240_000;

export default async function startDemo(): Promise<() => Promise<void>> {
  const data = join(root, "test-results", "browser-data");
  rmSync(data, { recursive: true, force: true });
  const port = await findFreePort(4310);
  const demo = spawn(process.execPath, ["--import", "tsx", "scripts/demo.ts"], {
    cwd: root,
    stdio: ["ignore", "pipe", "pipe"],
    env: { ...process.env, OGEE_DATA: data, PORT: String(port) },
  });
  const ended = new Promise<void>((resolve) => demo.once("close", () => resolve()));
  let errors = "";
  demo.stderr.on("data", (chunk: Buffer) => {
    errors = (errors + chunk.toString()).slice(-4000);
  });
  await new Promise<void>((resolve, reject) => {
    const late = setTimeout(
      () => reject(new Error(`The demo was not ready in time.\n${errors}`)),
      READY_WITHIN_MS,
    );
    demo.once("close", () => reject(new Error(`The demo ended before it was ready.\n${errors}`)));
    createInterface({ input: demo.stdout }).on("line", (line) => {
      const person = /^sign-in (\S+) (\S+) (\S+)$/.exec(line);
      if (person) {
        const role = (person[1] as string).toUpperCase();
        process.env[`OGEE_TEST_${role}`] = `${person[2]} ${person[3]}`;
      }
      const ready = /^ready (\S+)$/.exec(line);
      if (ready) {
        clearTimeout(late);
        process.env.OGEE_TEST_ADDRESS = ready[1];
        resolve();
      }
    });
  });
  return async () => {
    demo.kill("SIGINT");
    await ended;
  };
}
