import { EngineError, flag } from "#app/engine/errors.ts";
import type { Dialect, Flag } from "#app/engine/types.ts";

export type Encoding = Dialect["encoding"];

/** A file as bytes of one code that has ASCII below 128: UTF-8, or Windows-1252. */
export interface Decoded {
  /** Without the mark; UTF-16 is written anew as UTF-8, everything else is the file's own bytes. */
  bytes: Uint8Array;
  encoding: Encoding;
  flags: Flag[];
}

/**
 * Tells a file's encoding by its mark, else by whether it is valid UTF-8; what is not is
 * Windows-1252, flagged `encoding_guessed`.
 *
 * @param cut  the bytes are a file's first part: they may end inside a letter
 * @throws EngineError "unreadable" for an empty file and for one that holds a NUL (a binary file, or
 *   UTF-16 without a mark)
 */
export function decode(file: Uint8Array, cut = false): Decoded {
  if (file.length === 0) throw new EngineError("unreadable", "The file is empty.");
  const utf16 = utf16Mark(file);
  if (utf16 !== null) {
    const bytes = utf8FromUtf16(file.subarray(2), utf16 === "utf-16le");
    refuseNul(bytes);
    return { bytes, encoding: utf16, flags: [] };
  }
  const marked = file[0] === 0xef && file[1] === 0xbb && file[2] === 0xbf;
  const bytes = marked ? file.subarray(3) : file;
  refuseNul(bytes);
  return isUtf8(bytes, cut)
    ? { bytes, encoding: "utf-8", flags: [] }
    : { bytes, encoding: "windows-1252", flags: [flag("encoding_guessed")] };
}

/** Bytes of `Decoded` → text. */
export function textOf(bytes: Uint8Array, encoding: Encoding): string {
  if (encoding !== "windows-1252")
    return new TextDecoder("utf-8", { ignoreBOM: true }).decode(bytes);
  // By hand: some versions of Node.js read 0x80 to 0x9f of Windows-1252 as Latin-1.
  let text = "";
  for (const byte of bytes) {
    text +=
      byte >= 0x80 && byte < 0xa0 ? WINDOWS_1252.charAt(byte - 0x80) : String.fromCharCode(byte);
  }
  return text;
}

/** 0x80 to 0x9f; the five codes without a letter stand for themselves (WHATWG Encoding). */
const WINDOWS_1252 = "€\u0081‚ƒ„…†‡ˆ‰Š‹Œ\u008dŽ\u008f\u0090‘’“”•–—˜™š›œ\u009džŸ";

function utf16Mark(file: Uint8Array): "utf-16le" | "utf-16be" | null {
  if (file[0] === 0xff && file[1] === 0xfe) return "utf-16le";
  if (file[0] === 0xfe && file[1] === 0xff) return "utf-16be";
  return null;
}

function refuseNul(bytes: Uint8Array): void {
  const at = bytes.indexOf(0);
  if (at < 0) return;
  let line = 1;
  for (let i = 0; i < at; i++) if (bytes[i] === 0x0a) line++;
  const sixteen = at < 2 && bytes[at + 1] !== 0 && (bytes[at + 2] === 0 || bytes.length <= 4);
  throw new EngineError(
    "unreadable",
    sixteen
      ? "The file looks like UTF-16 without its mark; save it as UTF-8."
      : `Line ${line} holds a byte of zero, so the file is not a text table; export the recording as text.`,
    { line },
  );
}

/** Well-formed UTF-8 (Unicode 15, table 3-7). */
function isUtf8(bytes: Uint8Array, cut: boolean): boolean {
  const length = bytes.length;
  const aligned = -bytes.byteOffset & 3;
  const words = new Uint32Array(
    bytes.buffer,
    bytes.byteOffset + aligned,
    Math.max(0, length - aligned) >>> 2,
  );
  let i = 0;
  while (i < length) {
    const lead = bytes[i] as number;
    if (lead < 0x80) {
      i++;
      // Nearly all of a recording is ASCII: four bytes at a time.
      if (((i - aligned) & 3) === 0) {
        let w = (i - aligned) >>> 2;
        while (w < words.length && ((words[w] as number) & 0x80808080) === 0) w++;
        i = aligned + 4 * w;
      }
      continue;
    }
    const more = lead >= 0xf0 ? 3 : lead >= 0xe0 ? 2 : 1;
    if (lead < 0xc2 || lead > 0xf4) return false;
    for (let k = 1; k <= more; k++) {
      const next = bytes[i + k];
      if (next === undefined) return cut;
      let low = 0x80;
      let high = 0xbf;
      if (k === 1) {
        if (lead === 0xe0) low = 0xa0;
        if (lead === 0xed) high = 0x9f;
        if (lead === 0xf0) low = 0x90;
        if (lead === 0xf4) high = 0x8f;
      }
      if (next < low || next > high) return false;
    }
    i += more + 1;
  }
  return true;
}

/** A half without its partner becomes U+FFFD; an odd last byte is left out. */
function utf8FromUtf16(file: Uint8Array, littleEndian: boolean): Uint8Array {
  const units = Math.floor(file.length / 2);
  const high = littleEndian ? 1 : 0;
  const unit = (i: number): number =>
    i < units ? ((file[2 * i + high] as number) << 8) | (file[2 * i + 1 - high] as number) : -1;
  let length = 0;
  for (let i = 0; i < units; i++) {
    const code = unit(i);
    length += code < 0x80 ? 1 : code < 0x800 ? 2 : 3; // a pair of halves takes 4 of these 6
  }
  const out = new Uint8Array(length);
  let at = 0;
  for (let i = 0; i < units; i++) {
    let code = unit(i);
    if (code >= 0xd800 && code <= 0xdfff) {
      const low = unit(i + 1);
      if (code < 0xdc00 && low >= 0xdc00 && low <= 0xdfff) {
        code = 0x10000 + ((code - 0xd800) << 10) + (low - 0xdc00);
        i++;
      } else code = 0xfffd;
    }
    if (code < 0x80) out[at++] = code;
    else {
      if (code < 0x800) out[at++] = 0xc0 | (code >> 6);
      else {
        if (code < 0x10000) out[at++] = 0xe0 | (code >> 12);
        else {
          out[at++] = 0xf0 | (code >> 18);
          out[at++] = 0x80 | ((code >> 12) & 0x3f);
        }
        out[at++] = 0x80 | ((code >> 6) & 0x3f);
      }
      out[at++] = 0x80 | (code & 0x3f);
    }
  }
  return out.subarray(0, at);
}
