import { DrizzleQueryError } from "drizzle-orm";
import { expect, it } from "vitest";
import { tellError } from "./log.server.ts";

it("tells a failed query and its cause without the values that were to be stored", () => {
  const cause = Object.assign(new Error("UNIQUE constraint failed: people.email"), {
    code: "SQLITE_CONSTRAINT",
  });
  const query = "insert into people (email, password_hash) values (?, ?)";
  const failed = new DrizzleQueryError(query, ["ada@lab.example", "$argon2id$v=19$x"], cause);
  const told = tellError(new Error("The lab was not made.", { cause: failed }));
  expect(told).toMatchObject({
    message: "The lab was not made.",
    at: expect.arrayContaining([expect.stringMatching(/^at .*log\.server\.test\.ts/)]),
    cause: {
      message: `Failed query: ${query}`,
      cause: { message: "UNIQUE constraint failed: people.email", code: "SQLITE_CONSTRAINT" },
    },
  });
  expect(JSON.stringify(told)).not.toMatch(/ada@|argon2id/);
});
