import { describe, expect, it } from "vitest";
import { decode, textOf } from "#app/engine/parse/decode.ts";

const utf8 = (text: string): Uint8Array => new TextEncoder().encode(text);

function utf16(text: string, order: "le" | "be", mark: boolean): Uint8Array {
  const units = Array.from({ length: text.length }, (_, i) => text.charCodeAt(i));
  if (mark) units.unshift(0xfeff);
  return Uint8Array.from(
    units.flatMap((unit) => (order === "le" ? [unit & 255, unit >> 8] : [unit >> 8, unit & 255])),
  );
}

function read(file: Uint8Array, cut = false): { text: string; encoding: string; flags: string[] } {
  const { bytes, encoding, flags } = decode(file, cut);
  return { text: textOf(bytes, encoding), encoding, flags: flags.map((f) => f.code) };
}

const TEXT = "t;Winkel (°);µ → 😀\r\n0;1;2\r\n";

describe("decode", () => {
  it("reads UTF-8 without and with a mark, and takes the mark off", () => {
    const expected = { text: TEXT, encoding: "utf-8", flags: [] };
    expect(read(utf8(TEXT))).toEqual(expected);
    expect(read(utf8(`\ufeff${TEXT}`))).toEqual(expected);
  });

  it("reads UTF-16 of both byte orders by its mark, pairs of halves too", () => {
    expect(read(utf16(TEXT, "le", true))).toEqual({ text: TEXT, encoding: "utf-16le", flags: [] });
    expect(read(utf16(TEXT, "be", true))).toEqual({ text: TEXT, encoding: "utf-16be", flags: [] });
  });

  it("puts the replacement letter for half a pair and leaves an odd last byte out", () => {
    const file = utf16("a\ud83db", "le", true);
    expect(read(Uint8Array.of(...file, 0x31)).text).toBe("a\ufffdb");
  });

  it("reads anything else as Windows-1252 and flags the guess", () => {
    const file = Uint8Array.of(0x57, 0xb0, 0x80, 0x96, 0xb5, 0x31);
    expect(read(file)).toEqual({
      text: "W°€–µ1",
      encoding: "windows-1252",
      flags: ["encoding_guessed"],
    });
  });

  it("takes no ill-formed UTF-8 for UTF-8: overlong, half of a pair, too large, broken off", () => {
    const bad = [
      [0xc0, 0xaf],
      [0xe0, 0x80, 0xaf],
      [0xed, 0xa0, 0x80],
      [0xf4, 0x90, 0x80, 0x80],
      [0x80],
      [0xc3, 0x28],
      [0x61, 0xc3],
    ];
    for (const bytes of bad) expect(read(Uint8Array.from(bytes)).encoding).toBe("windows-1252");
  });

  it("finds a stray letter of another code wherever it stands among ASCII", () => {
    for (let at = 0; at < 24; at++) {
      const file = new Uint8Array(25).fill(0x31);
      file[at] = 0xb0;
      expect(decode(file.subarray(at > 3 ? 1 : 0)).encoding).toBe("windows-1252");
    }
  });

  it("lets a first part of a file end inside a letter", () => {
    expect(read(utf8("a°").subarray(0, 2), true).encoding).toBe("utf-8");
  });

  it("refuses a NUL with its line", () => {
    expect(() => decode(Uint8Array.of(0x61, 0x0a, 0x62, 0x00, 0x63, 0x64))).toThrow(
      expect.objectContaining({ name: "unreadable", line: 2 }),
    );
  });

  it("refuses UTF-16 without a mark and says what it looks like", () => {
    for (const order of ["le", "be"] as const) {
      expect(() => decode(utf16("t,a\n0,1\n", order, false))).toThrow(/UTF-16 without its mark/);
    }
  });

  it("refuses an empty file", () => {
    expect(() => decode(new Uint8Array(0))).toThrow(
      expect.objectContaining({ name: "unreadable", message: "The file is empty." }),
    );
  });
});
