import { spawnSync } from "node:child_process";
import { createHash } from "node:crypto";
import {
  existsSync,
  lstatSync,
  mkdirSync,
  mkdtempSync,
  readdirSync,
  readFileSync,
  rmSync,
  symlinkSync,
  truncateSync,
  writeFileSync,
} from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { afterAll, beforeAll, describe, expect, it } from "vitest";
import type { Result } from "#app/engine/types.ts";
import { answer } from "../../scripts/analyze.ts";

/*
 * The headless command as others call it: exits, standard output, the last line of standard error.
 * What it computes is held by crosscheck.test.ts and its neighbours.
 */

const ROOT = join(import.meta.dirname, "../..");
const CASE = join(ROOT, "fixtures/transient-crosscheck");
const FIRST = join(CASE, "wrist-1.csv");
const SECOND = join(CASE, "wrist-2.csv");
const EMPTY = join(CASE, "wrist-empty.csv");
const PROTOCOL = join(CASE, "wrist-usual.protocol.json");
/** A process starts in about a second; a busy machine takes longer. */
const PATIENCE_MS = 60_000;

let folder = "";
beforeAll(() => {
  folder = mkdtempSync(join(tmpdir(), "analyze-command-"));
});
afterAll(() => rmSync(folder, { recursive: true, force: true }));

function command(args: string[], input: string | Buffer = "") {
  const ran = spawnSync(process.execPath, ["--import", "tsx", "scripts/analyze.ts", ...args], {
    cwd: ROOT,
    input,
    maxBuffer: 64 * 1024 * 1024,
    timeout: PATIENCE_MS,
  });
  const stderr = ran.stderr.toString();
  return {
    exit: ran.status,
    stdout: ran.stdout.toString(),
    stderr,
    last: stderr.trimEnd().split("\n").at(-1) ?? "",
  };
}

/** Writes a file of this test and gives its path. */
function file(name: string, content: string | Buffer): string {
  const path = join(folder, name);
  writeFileSync(path, content);
  return path;
}

/** The command without a process of its own, for the many ways to be refused. */
async function refusal(args: string[], exit: 2 | 3): Promise<string> {
  const given = await answer(args);
  expect({ exit: given.exit, stdout: given.stdout }).toEqual({ exit, stdout: "" });
  expect(given.stderr).toMatch(/^analyze: .+: .+[.]\n$/);
  return given.stderr.trimEnd();
}

const protocol = () => JSON.parse(readFileSync(PROTOCOL, "utf8")) as Record<string, unknown>;
const changed = (name: string, changes: Record<string, unknown>) =>
  file(name, JSON.stringify({ ...protocol(), ...changes }));

describe("the headless command", { timeout: PATIENCE_MS * 3 }, () => {
  it("prints one document, the same bytes on every run and wherever the options stand", () => {
    const once = command([FIRST, SECOND, "--protocol", PROTOCOL, "--rig", EMPTY]);
    expect(once.exit).toBe(0);
    expect(once.stdout.endsWith("}\n")).toBe(true);
    const result = JSON.parse(once.stdout) as Result;
    expect(result.recordings.map((recording) => recording.file)).toEqual([FIRST, SECOND]);
    expect(result.protocol_sha256).toBe(
      createHash("sha256").update(readFileSync(PROTOCOL)).digest("hex"),
    );
    expect(result.pooled.map((pooled) => pooled.direction)).toEqual([
      "extension",
      "flexion",
      "radial",
      "ulnar",
    ]);
    expect(once.stderr).toContain(`analyze: ${FIRST}: `);

    const again = command(["--rig", EMPTY, "--protocol", PROTOCOL, FIRST, SECOND]);
    expect(again.stdout).toBe(once.stdout);
  });

  it("reads a recording from standard input and writes FILE whole, with nothing on standard output", () => {
    const out = join(folder, "result.json");
    writeFileSync(out, "the one before");
    const ran = command(["-", "--out", out, "--protocol", PROTOCOL], readFileSync(SECOND));
    expect(ran).toMatchObject({ exit: 0, stdout: "" });
    const result = JSON.parse(readFileSync(out, "utf8")) as Result;
    expect(result.recordings[0]?.file).toBe("-");
    expect(result.recordings[0]?.sha256).toBe(
      createHash("sha256").update(readFileSync(SECOND)).digest("hex"),
    );
    expect(readdirSync(folder).filter((name) => name.endsWith(".part"))).toEqual([]);
  });

  it("makes again what was made by hand, from the exported windows", async () => {
    const found = JSON.parse((await answer([SECOND, "--protocol", PROTOCOL])).stdout) as Result;
    const sha = found.recordings[0]?.sha256;
    const windows = file(
      "windows.json",
      JSON.stringify({
        version: 1,
        windows: found.windows.map(({ axis, onset_s, window_ms, included, reason }) => ({
          recording_sha256: sha,
          axis,
          onset_s,
          window_ms,
          included,
          reason,
        })),
      }),
    );
    const byHand = JSON.parse(
      (await answer([SECOND, "--windows", windows, "--protocol", PROTOCOL])).stdout,
    ) as Result;
    expect(byHand).toEqual(found);
  });

  it("ends with 2 where the call is wrong", async () => {
    expect(await refusal([], 2)).toMatch(/^analyze: --protocol: /);
    expect(await refusal(["--protocol", PROTOCOL], 2)).toMatch(/^analyze: RECORDING: /);
    expect(await refusal([FIRST, "--protocol"], 2)).toMatch(/^analyze: --protocol: /);
    expect(await refusal([FIRST, "--protocol", PROTOCOL, "--fast"], 2)).toMatch(
      /^analyze: --fast: /,
    );
    expect(await refusal([FIRST, "--protocol", PROTOCOL, "--rig"], 2)).toMatch(/^analyze: --rig: /);
    expect(await refusal(["-", "-", "--protocol", PROTOCOL], 2)).toMatch(/^analyze: -: /);
  });

  it("ends with 2 and names the protocol's file and line, or its field", async () => {
    const missing = join(folder, "none.json");
    expect(await refusal([FIRST, "--protocol", missing], 2)).toBe(
      `analyze: ${missing}: There is no such file.`,
    );
    const twice = file("twice.json", '{\n"version": 1,\n"version": 1\n}');
    expect(await refusal([FIRST, "--protocol", twice], 2)).toMatch(`analyze: ${twice}:3: Line 3`);
    const unit = changed("unit.json", { time: { column: "t", unit: "minutes" } });
    expect(await refusal([FIRST, "--protocol", unit], 2)).toMatch(
      /^analyze: time\.unit: "minutes"/,
    );
    const sweep = file("sweep.json", '{"version":1,"kind":"sweep"}');
    expect(await refusal([FIRST, "--protocol", sweep], 2)).toMatch(/^analyze: kind: /);
    const large = file("large.json", `"${"x".repeat(2 * 1024 * 1024)}"`);
    expect(await refusal([FIRST, "--protocol", large], 2)).toContain(`analyze: ${large}: `);
  });

  it("ends with 2 where a protocol does not suit the rate that a file turns out to have", async () => {
    const high = changed("high.json", {
      filter: { family: "butterworth", order: 2, cutoff_hz: 500 },
    });
    expect(await refusal([SECOND, "--protocol", high], 2)).toMatch(/^analyze: filter\.cutoff_hz: /);
    const short = changed("short.json", { window_ms: [0, 4], robustness: undefined });
    expect(await refusal([SECOND, "--protocol", short], 2)).toMatch(/^analyze: window_ms: /);
  });

  it("ends with 2 where a file is given twice, by whatever name", async () => {
    const copy = file("copy.csv", readFileSync(SECOND));
    expect(await refusal([SECOND, copy, "--protocol", PROTOCOL], 2)).toContain(
      `analyze: ${copy}: `,
    );
    expect(await refusal([SECOND, "--rig", copy, "--protocol", PROTOCOL], 2)).toContain(copy);
  });

  it("ends with 2 and names WINDOWS where it is wrong or of other recordings", async () => {
    const entry = {
      recording_sha256: "0".repeat(64),
      axis: "FE",
      onset_s: 1,
      window_ms: [0, 80],
      included: true,
      reason: null,
    };
    const refused = async (name: string, document: unknown) => {
      const path = file(name, JSON.stringify(document));
      const last = await refusal([SECOND, "--windows", path, "--protocol", PROTOCOL], 2);
      expect(last).toContain(`analyze: ${path}: `);
      return last;
    };
    expect(await refused("w1.json", { version: 1, windows: [entry] })).toContain(
      "None of its windows",
    );
    expect(await refused("w2.json", { version: 2, windows: [entry] })).toContain("Version 2");
    expect(await refused("w3.json", { version: 1, windows: [{ ...entry, K: 1 }] })).toContain(
      "windows.0.K",
    );
    const sha = createHash("sha256").update(readFileSync(SECOND)).digest("hex");
    const near = [1.3721, 1.3722].map((onset_s) => ({ ...entry, recording_sha256: sha, onset_s }));
    expect(await refused("w5.json", { version: 1, windows: near })).toContain("same sample");
    const foreign = { ...entry, recording_sha256: sha, axis: "PS" };
    expect(await refused("w4.json", { version: 1, windows: [foreign] })).toContain(
      "windows.0.axis",
    );
  });

  it("lets windows of other recordings be, whatever their axis, and takes those of the empty rig", async () => {
    const sha = (path: string) => createHash("sha256").update(readFileSync(path)).digest("hex");
    const entry = { onset_s: 1.372, window_ms: [0, 80], included: true, reason: null };
    const windows = file(
      "of-others.json",
      JSON.stringify({
        version: 1,
        windows: [
          { ...entry, recording_sha256: "0".repeat(64), axis: "PS" },
          { ...entry, recording_sha256: sha(EMPTY), axis: "FE" },
        ],
      }),
    );
    const given = await answer([
      ...[SECOND, "--rig", EMPTY, "--windows", windows, "--protocol", PROTOCOL],
    ]);
    expect(given.exit).toBe(0);
    const result = JSON.parse(given.stdout) as Result;
    // One window of the rig has no spread.
    expect(result.rig.FE?.K_sd).toBeNull();
    expect(result.windows.length).toBeGreaterThan(4);
  });

  it("ends with 3 and names the first bad recording, with its line, and makes no FILE", async () => {
    const out = join(folder, "never.json");
    const lines = readFileSync(SECOND, "utf8").split("\n");
    lines[99] = `${lines[99]?.split(",").slice(0, -1).join(",")},loose`;
    const bad = file("bad.csv", lines.join("\n"));
    const missing = join(folder, "none.csv");
    const last = await refusal([FIRST, bad, missing, "--out", out, "--protocol", PROTOCOL], 3);
    expect(last).toContain(`analyze: ${bad}:100: `);
    expect(existsSync(out)).toBe(false);
    expect(await refusal([missing, "--protocol", PROTOCOL], 3)).toBe(
      `analyze: ${missing}: There is no such file.`,
    );
    expect(await refusal([folder, "--protocol", PROTOCOL], 3)).toContain("folder");
  });

  it("refuses by their start what is far too large and no recording, and a pipe without an end", async () => {
    const zeros = join(folder, "zeros.bin");
    writeFileSync(zeros, "");
    truncateSync(zeros, 3 * 1024 ** 3);
    const began = performance.now();
    expect(await refusal([zeros, "--protocol", PROTOCOL], 3)).toMatch(
      `analyze: ${zeros}:1: Line 1 holds a byte of zero`,
    );
    expect(performance.now() - began).toBeLessThan(10_000);
    truncateSync(zeros, 2 ** 43);
    expect(await refusal([zeros, "--protocol", PROTOCOL], 3)).toMatch(/ larger than | memory/);
    expect(await refusal(["/dev/zero", "--protocol", PROTOCOL], 3)).toContain("byte of zero");
    expect(await refusal([SECOND, "--protocol", "/dev/zero"], 2)).toContain("larger than 1 MiB");
  });

  it("writes through a link and leaves it one", async () => {
    const target = file("target.json", "old");
    const link = join(folder, "link.json");
    symlinkSync(target, link);
    expect(await answer([SECOND, "--protocol", PROTOCOL, "--out", link])).toMatchObject({
      exit: 0,
    });
    expect(lstatSync(link).isSymbolicLink()).toBe(true);
    expect(readFileSync(target, "utf8")).toContain("result_version");
  });

  it("ends with 2 where FILE cannot be made, and never takes the place of what it reads", async () => {
    const nowhere = join(folder, "no", "folder", "result.json");
    expect(await refusal([SECOND, "--protocol", PROTOCOL, "--out", nowhere], 2)).toContain(nowhere);
    mkdirSync(join(folder, "taken"));
    expect(
      await refusal([SECOND, "--protocol", PROTOCOL, "--out", join(folder, "taken")], 2),
    ).toContain("folder");
    const own = file("own.csv", readFileSync(SECOND));
    expect(await refusal([own, "--protocol", PROTOCOL, "--out", own], 2)).toContain(
      "take the place",
    );
    expect(readFileSync(own)).toEqual(readFileSync(SECOND));
  });

  it("says the reason alone as a process too: no stack, nothing on standard output", () => {
    const empty = command(["-", "--protocol", PROTOCOL]);
    expect(empty).toMatchObject({ exit: 3, stdout: "" });
    expect(empty.stderr).toMatch(/^analyze: -.*: .+[.]\n$/);
    const wrong = command([FIRST]);
    expect(wrong).toMatchObject({ exit: 2, stdout: "" });
    expect(wrong.stderr).toMatch(/^analyze: --protocol: .+[.]\n$/);
  });

  it("says nothing but the reason of a name with a line end in it", async () => {
    expect(await refusal(["two\nlines.csv", "--protocol", PROTOCOL], 3)).toBe(
      "analyze: two lines.csv: There is no such file.",
    );
  });
});
