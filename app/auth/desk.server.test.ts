import { mkdtempSync, readdirSync, readFileSync, rmSync, statSync, writeFileSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { afterEach, beforeEach, describe, expect, it } from "vitest";
import { readEnv } from "#app/env.server.ts";
import { readSessionSecret } from "./desk.server.ts";

let folder: string;
beforeEach(() => {
  folder = mkdtempSync(join(tmpdir(), "ogee-secret-"));
});
afterEach(() => rmSync(folder, { recursive: true, force: true }));

const file = () => join(folder, "session-secret");
const read = (env: Record<string, string> = {}) =>
  readSessionSecret(readEnv({ OGEE_DATA: folder, ...env }));

describe("the session secret", () => {
  it("is made once, for this user's eyes alone, and is the same at the next start", () => {
    const made = read();
    expect(made).toMatch(/^[\w-]{43}$/);
    expect(read()).toBe(made);
    expect(readdirSync(folder)).toEqual(["session-secret"]);
    expect(statSync(file()).mode & 0o777).toBe(0o600);
  });

  it("is made anew where an interrupted start left none or a part of one", () => {
    writeFileSync(file(), "");
    const made = read();
    expect(made).toHaveLength(43);
    expect(readFileSync(file(), "utf8")).toBe(made);
    writeFileSync(file(), made.slice(0, 10));
    expect(read()).toHaveLength(43);
  });

  it("is the environment's where that names one", () => {
    const SESSION_SECRET = "thirty-two characters, or more of them";
    expect(read({ SESSION_SECRET })).toBe(SESSION_SECRET);
    expect(readdirSync(folder)).toEqual([]);
  });
});
