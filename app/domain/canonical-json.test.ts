import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { canonicalJson } from "./canonical-json.ts";

describe("canonical JSON", () => {
  it("sorts keys by code unit at every level and leaves no white space", () => {
    expect(canonicalJson({ b: [1, { z: null, a: "x y" }], B: 0.1, a: undefined })).toBe(
      '{"B":0.1,"b":[1,{"a":"x y","z":null}]}',
    );
  });

  it("is the same text for the same value whatever the order of keys, and reads back as the value", () => {
    fc.assert(
      fc.property(fc.dictionary(fc.string(), fc.jsonValue()), (value) => {
        const turned = Object.fromEntries(Object.entries(value).reverse());
        expect(canonicalJson(turned)).toBe(canonicalJson(value));
        expect(JSON.parse(canonicalJson(value))).toEqual(JSON.parse(JSON.stringify(value)));
      }),
    );
  });

  it("refuses what JSON would turn into null without a word", () => {
    expect(() => canonicalJson({ K: Number.NaN })).toThrow(RangeError);
    expect(() => canonicalJson([Number.POSITIVE_INFINITY])).toThrow(RangeError);
    expect(() => canonicalJson([undefined])).toThrow(RangeError);
  });
});
