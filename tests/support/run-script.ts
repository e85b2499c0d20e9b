import { spawn } from "node:child_process";
import { join } from "node:path";

const root = join(import.meta.dirname, "..", "..");

/** Runs a command of the project as a person in a shell does, with `input` at its standard input. */
export async function runScript(
  script: string,
  args: readonly string[],
  { input = "", env = {} }: { input?: string; env?: Record<string, string> } = {},
): Promise<{ code: number | null; said: string }> {
  const child = spawn(process.execPath, ["--import", "tsx", script, ...args], {
    cwd: root,
    env: { PATH: process.env.PATH ?? "", ...env },
  });
  let said = "";
  for (const stream of [child.stdout, child.stderr]) {
    stream.on("data", (chunk: Buffer) => {
      said += chunk.toString();
    });
  }
  child.stdin.end(input);
  const code = await new Promise<number | null>((resolve) => child.once("close", resolve));
  return { code, said };
}
