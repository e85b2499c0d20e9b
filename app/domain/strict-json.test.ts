import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { parseStrictJson, StrictJsonError } from "./strict-json.ts";

function problem(text: string): StrictJsonError {
  try {
    parseStrictJson(text);
  } catch (error) {
    if (error instanceof StrictJsonError) return error;
    throw error;
  }
  throw new Error(`accepted: ${text.slice(0, 80)}`);
}

describe("strict JSON", () => {
  it("gives the values of JSON.parse for every JSON document", () => {
    fc.assert(
      fc.property(fc.json({ maxDepth: 6 }), (text) => {
        // fc.json makes documents without repeated keys.
        expect(parseStrictJson(text)).toEqual(JSON.parse(text));
      }),
    );
  });

  it("accepts and refuses the same texts as JSON.parse, repeated keys apart", () => {
    const characters = fc.constantFrom(...'{}[]":,\\ \n0123456789.-+eEtrufalsn/bx\u0001'.split(""));
    fc.assert(
      fc.property(fc.string({ unit: characters, maxLength: 12 }), (text) => {
        let expected: unknown;
        let isJson = true;
        try {
          expected = JSON.parse(text);
        } catch {
          isJson = false;
        }
        try {
          const value = parseStrictJson(text);
          expect(isJson).toBe(true);
          expect(value).toEqual(expected);
        } catch (error) {
          if (!(error instanceof StrictJsonError)) throw error;
          if (isJson) expect(error.message).toMatch(/stands twice/);
        }
      }),
      { numRuns: 3000 },
    );
  });

  it("reads escapes, exponents and white space", () => {
    expect(
      parseStrictJson(' { "a\\u00e9\\n" : [ -0.5e-3 , 1E2, true,false , null ] }\r\n'),
    ).toEqual({
      "aé\n": [-0.0005, 100, true, false, null],
    });
  });

  it("names line and position of a key that stands twice, also when it is written differently", () => {
    const error = problem('{\n  "unit": "deg",\n  "\\u0075nit": "rad"\n}');
    expect(error.message).toBe('Line 3, position 3: the key "unit" stands twice in one object.');
    expect([error.line, error.position]).toEqual([3, 3]);
  });

  it("keeps __proto__ as an own key, and a second one is still a repeat", () => {
    const value = parseStrictJson('{ "__proto__": { "polluted": true } }') as object;
    expect(Object.keys(value)).toEqual(["__proto__"]);
    expect(Object.getPrototypeOf(value)).toBe(Object.prototype);
    expect(problem('{ "__proto__": 1, "__proto__": 2 }').message).toContain("stands twice");
    expect(Object.keys(parseStrictJson('{ "toString": 1 }') as object)).toEqual(["toString"]);
  });

  it("reads 32 levels and refuses 33", () => {
    const nested = (levels: number) => "[".repeat(levels) + "]".repeat(levels);
    expect(parseStrictJson(nested(32))).toBeInstanceOf(Array);
    expect(problem(nested(33)).message).toBe(
      "Line 1, position 33: more than 32 levels are nested.",
    );
    expect(problem("[".repeat(500_000)).message).toContain("32 levels");
  });

  it("reads 1 MiB and refuses one byte more, counted as UTF-8", () => {
    const filled = (bytes: number) => JSON.stringify("x".repeat(bytes - 2));
    expect(parseStrictJson(filled(1024 * 1024))).toBeTypeOf("string");
    expect(problem(filled(1024 * 1024 + 1)).message).toContain("1 MiB");
    expect(problem(JSON.stringify("é".repeat(600_000))).message).toContain("1 MiB");
  });

  it.each([
    ["", "the document is empty"],
    ["{} {}", "behind the end"],
    ["[1,]", "a value is expected"],
    ['{"a":1,}', "a key"],
    ["{'a':1}", "a key"],
    ["[NaN]", "a value is expected"],
    ["[01]", "a comma or ]"],
    ["[+1]", "a value is expected"],
    ["[1.]", "a comma or ]"],
    ['["\t"]', "control character"],
    ['["\\x"]', "backslash"],
    ['["\\u12G4"]', "four hexadecimal"],
    ['["abc', "no closing quote"],
    ["// a\n{}", "a value is expected"],
  ])("refuses %j with a sentence", (text, words) => {
    expect(problem(text).message).toMatch(/^Line \d+, position \d+: .*\.$/);
    expect(problem(text).message).toContain(words);
  });
});
