/** Starts the demo as a process of its own and reads what it prints: for browser tests and screenshots. */
import { spawn } from "node:child_process";
import { rmSync } from "node:fs";
import { join } from "node:path";
import { createInterface } from "node:readline";
import { findFreePort } from "./ports.ts";

const root = join(import.meta.dirname, "..", "..");
const READY_WITHIN_MS = 240_000;

export interface RunningDemo {
  address: string;
  /** By role. */
  signIns: Record<string, { email: string; password: string }>;
  stop(): Promise<void>;
}

/**
 * @param folder  cleared before the start
 * @param env  settings that stand in the shell beside this one's
 */
export async function runDemo(
  folder: string,
  env: Record<string, string> = {},
): Promise<RunningDemo> {
  rmSync(folder, { recursive: true, force: true });
  const port = await findFreePort(4310);
  const demo = spawn(process.execPath, ["--import", "tsx", "scripts/demo.ts"], {
    cwd: root,
    stdio: ["ignore", "pipe", "pipe"],
    env: { ...process.env, ...env, OGEE_DATA: folder, PORT: String(port) },
  });
  const ended = new Promise<void>((resolve) => demo.once("close", () => resolve()));
  let errors = "";
  demo.stderr.on("data", (chunk: Buffer) => {
    errors = (errors + chunk.toString()).slice(-4000);
  });
  const signIns: RunningDemo["signIns"] = {};
  const address = await new Promise<string>((resolve, reject) => {
    const late = setTimeout(
      () => reject(new Error(`The demo was not ready in time.\n${errors}`)),
      READY_WITHIN_MS,
    );
    demo.once("close", () => reject(new Error(`The demo ended before it was ready.\n${errors}`)));
    createInterface({ input: demo.stdout }).on("line", (line) => {
      const person = /^sign-in (\S+) (\S+) (\S+)$/.exec(line);
      if (person?.[1] && person[2] && person[3]) {
        signIns[person[1]] = { email: person[2], password: person[3] };
      }
      const ready = /^ready (\S+)$/.exec(line);
      if (ready?.[1]) {
        clearTimeout(late);
        resolve(ready[1]);
      }
    });
  });
  return {
    address,
    signIns,
    stop: async () => {
      demo.kill("SIGINT");
      await ended;
    },
  };
}
