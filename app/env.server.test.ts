import { describe, expect, it } from "vitest";
import { EnvError, readEnv } from "./env.server.ts";

function sentencesOf(source: Record<string, string>): readonly string[] {
  try {
    readEnv(source);
  } catch (error) {
    if (error instanceof EnvError) return error.sentences;
    throw error;
  }
  return [];
}

const SERVED = {
  HOST: "0.0.0.0",
  PUBLIC_URL: "https://ogee.example",
  SESSION_SECRET: "s".repeat(32),
  S3_ENDPOINT: "https://storage.example",
  S3_BUCKET: "recordings",
  S3_ACCESS_KEY_ID: "key",
  S3_SECRET_ACCESS_KEY: "secret",
};

describe("environment", () => {
  it("needs nothing for a run on this machine alone", () => {
    const env = readEnv({});
    expect(env.host).toBe("127.0.0.1");
    expect(env.publicUrl.href).toBe("http://127.0.0.1:4300/");
    expect(env.databaseUrl).toMatch(/^file:\/\/\/.*\/\.data\/local\/ogee\.db$/);
    expect(env.sessionSecret).toBeNull();
    expect(env.isDemo).toBe(false);
  });

  it("keeps the database in the data folder unless told", () => {
    expect(readEnv({ OGEE_DATA: "/srv/a b" }).databaseUrl).toBe("file:///srv/a%20b/ogee.db");
    expect(readEnv({ DATABASE_URL: "libsql://db.example" }).databaseUrl).toBe(
      "libsql://db.example",
    );
  });

  it("counts an empty setting as left out", () => {
    expect(readEnv({ PORT: "", PUBLIC_URL: "" }).port).toBe(4300);
  });

  it("is complete for a server that others reach", () => {
    expect(sentencesOf(SERVED)).toEqual([]);
    expect(readEnv(SERVED).storage.endpoint).toBe("https://storage.example");
  });

  it("names every setting that a server for others lacks", () => {
    const sentences = sentencesOf({ HOST: "0.0.0.0" });
    expect(sentences).toHaveLength(3);
    for (const name of ["PUBLIC_URL", "SESSION_SECRET", "S3_ENDPOINT"]) {
      expect(sentences.some((sentence) => sentence.startsWith(`${name} is missing`))).toBe(true);
    }
  });

  it("says what is wrong with a setting", () => {
    expect(sentencesOf({ PORT: "eighty" })).toEqual(["PORT must be a number from 1 to 65535."]);
    expect(sentencesOf({ PORT: "70000" })).toEqual(["PORT must be a number from 1 to 65535."]);
    expect(sentencesOf({ PUBLIC_URL: "ftp://ogee.example" })[0]).toMatch(
      /^PUBLIC_URL must be a web address/,
    );
    expect(sentencesOf({ SESSION_SECRET: "short" })).toEqual([
      "SESSION_SECRET must have at least 32 characters.",
    ]);
    expect(sentencesOf({ DATABASE_URL: "/srv/ogee.db" })[0]).toMatch(/^DATABASE_URL must start/);
  });

  it("never repeats a secret", () => {
    const said = sentencesOf({ SESSION_SECRET: "hunter2", S3_SECRET_ACCESS_KEY: "hunter3" });
    expect(said.join(" ")).not.toMatch(/hunter/);
  });

  it("does not enter a named storage with the keys of a local one", () => {
    expect(sentencesOf({ S3_ENDPOINT: "https://storage.example" })).toEqual([
      "S3_BUCKET is missing: S3_ENDPOINT needs it.",
      "S3_ACCESS_KEY_ID is missing: S3_ENDPOINT needs it.",
      "S3_SECRET_ACCESS_KEY is missing: S3_ENDPOINT needs it.",
    ]);
  });

  it("turns the second factor off only where nobody else reaches the server", () => {
    expect(readEnv({ OGEE_DEMO: "1" }).isDemo).toBe(true);
    expect(readEnv({ OGEE_DEMO: "1", HOST: "::1", PUBLIC_URL: "http://[::1]:4300" }).isDemo).toBe(
      true,
    );
    expect(sentencesOf({ ...SERVED, OGEE_DEMO: "1" })[0]).toMatch(/^OGEE_DEMO turns/);
    expect(sentencesOf({ OGEE_DEMO: "1", PUBLIC_URL: "https://ogee.example" })[0]).toMatch(
      /^OGEE_DEMO turns/,
    );
  });
});
