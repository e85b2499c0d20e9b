import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { ownPath } from "./own-path.ts";

describe("the address to go on to", () => {
  it.each(["/", "/studies", "/studies/a?x=1&y=2#z", "/recordings/å"])("keeps our own %s", (to) => {
    expect(ownPath(to)).toBe(encodeURI(to));
  });

  it.each([
    null,
    undefined,
    "",
    "studies",
    "//other.example",
    "//other.example/studies",
    "/\\other.example",
    "\\\\other.example",
    "/\t/other.example",
    "/\n/other.example",
    "/.//other.example",
    "/..//other.example",
    "/%2e//other.example",
    "/x/..//other.example",
    " //other.example",
    "https://other.example",
    "https:other.example",
    "javascript:alert(1)",
    "data:text/html,x",
    "//",
  ])("goes home instead of to %j", (to) => {
    expect(ownPath(to)).toBe("/");
  });

  it("never leaves our own host, whatever is asked", () => {
    const characters = fc.constantFrom(
      "/",
      "\\",
      ".",
      "\t",
      "\n",
      "%2e",
      "%2f",
      "@",
      ":",
      "a.example",
      "?",
      "#",
      "http",
    );
    fc.assert(
      fc.property(fc.array(characters, { maxLength: 12 }), (parts) => {
        // As a browser resolves the Location header on one of our pages.
        const where = new URL(ownPath(parts.join("")), "https://ogee.example/sign-in");
        return where.origin === "https://ogee.example";
      }),
      { numRuns: 5000 },
    );
  });
});
