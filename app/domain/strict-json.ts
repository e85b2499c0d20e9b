/**
 * JSON as people write it by hand and machines keep it: read strictly, so that a slip is found
 * here and not as a silent default later (RFC 8259; a key twice is an error, as in I-JSON, RFC 7493).
 */

/** Largest document, in bytes of UTF-8. */
export const JSON_MAX_BYTES = 1024 * 1024;
/** Deepest nesting of objects and arrays. */
export const JSON_MAX_LEVELS = 32;

/** A document that is no strict JSON. The message is a sentence that names line and position. */
export class StrictJsonError extends Error {
  /** Line of the text, from 1; null where no line is to blame (size). */
  readonly line: number | null;
  /** Character in that line, from 1. */
  readonly position: number | null;

  constructor(message: string, at: { line: number; position: number } | null) {
    super(message);
    this.name = "StrictJsonError";
    this.line = at?.line ?? null;
    this.position = at?.position ?? null;
  }
}

/**
 * The values of JSON.parse, and besides: a key that stands twice in one object, a document of more
 * than 1 MiB and one of more than 32 levels are errors, and `__proto__` stays a plain own key, so
 * that a schema can refuse it.
 *
 * @throws StrictJsonError
 */
export function parseStrictJson(text: string): unknown {
  if (isLongerThan(text, JSON_MAX_BYTES)) {
    throw new StrictJsonError("The document is larger than 1 MiB; it cannot be one of ours.", null);
  }
  return new Reader(text).document();
}

/** Whether `text` takes more than `bytes` bytes as UTF-8. */
function isLongerThan(text: string, bytes: number): boolean {
  if (text.length > bytes) return true;
  if (text.length * 3 <= bytes) return false;
  return new TextEncoder().encode(text).length > bytes;
}

const NUMBER = /-?(?:0|[1-9][0-9]*)(?:\.[0-9]+)?(?:[eE][+-]?[0-9]+)?/y;
const ESCAPES: Record<string, string> = {
  '"': '"',
  "\\": "\\",
  "/": "/",
  b: "\b",
  f: "\f",
  n: "\n",
  r: "\r",
  t: "\t",
};

class Reader {
  private at = 0;
  private readonly text: string;

  constructor(text: string) {
    this.text = text;
  }

  document(): unknown {
    this.skipSpace();
    if (this.at === this.text.length) this.fail("the document is empty");
    const value = this.value(0);
    this.skipSpace();
    if (this.at < this.text.length) this.fail("something stands behind the end of the document");
    return value;
  }

  private value(level: number): unknown {
    const mark = this.text[this.at];
    if (mark === "{") return this.object(level + 1);
    if (mark === "[") return this.array(level + 1);
    if (mark === '"') return this.string();
    for (const [word, value] of [
      ["true", true],
      ["false", false],
      ["null", null],
    ] as const) {
      if (this.text.startsWith(word, this.at)) {
        this.at += word.length;
        return value;
      }
    }
    NUMBER.lastIndex = this.at;
    const number = NUMBER.exec(this.text);
    if (number === null) this.fail("a value is expected here");
    this.at += number[0].length;
    return Number(number[0]);
  }

  private object(level: number): Record<string, unknown> {
    this.refuseDepth(level);
    const object: Record<string, unknown> = {};
    this.at += 1;
    this.skipSpace();
    if (this.text[this.at] === "}") {
      this.at += 1;
      return object;
    }
    while (true) {
      this.skipSpace();
      const start = this.at;
      if (this.text[start] !== '"') this.fail('a key in "quotes" is expected here');
      const key = this.string();
      if (Object.hasOwn(object, key)) {
        this.at = start;
        this.fail(`the key ${shown(key)} stands twice in one object`);
      }
      this.skipSpace();
      if (this.text[this.at] !== ":") this.fail("a colon is expected behind the key");
      this.at += 1;
      this.skipSpace();
      // Not by assignment: `__proto__` would set the prototype and vanish.
      Object.defineProperty(object, key, {
        value: this.value(level),
        enumerable: true,
        writable: true,
        configurable: true,
      });
      if (this.isLast("}")) return object;
    }
  }

  private array(level: number): unknown[] {
    this.refuseDepth(level);
    const array: unknown[] = [];
    this.at += 1;
    this.skipSpace();
    if (this.text[this.at] === "]") {
      this.at += 1;
      return array;
    }
    while (true) {
      this.skipSpace();
      array.push(this.value(level));
      if (this.isLast("]")) return array;
    }
  }

  /** Takes the comma or the closing bracket behind an entry. */
  private isLast(close: "}" | "]"): boolean {
    this.skipSpace();
    const mark = this.text[this.at];
    if (mark !== "," && mark !== close) this.fail(`a comma or ${close} is expected here`);
    this.at += 1;
    return mark === close;
  }

  private string(): string {
    const start = this.at;
    this.at += 1;
    let value = "";
    let copied = this.at;
    while (true) {
      const code = this.text.charCodeAt(this.at);
      if (Number.isNaN(code)) {
        this.at = start;
        this.fail("the text that begins here has no closing quote");
      }
      if (code === 0x22) {
        value += this.text.slice(copied, this.at);
        this.at += 1;
        return value;
      }
      if (code < 0x20) this.fail("a line end, tab or control character inside quotes is not JSON");
      if (code === 0x5c) {
        value += this.text.slice(copied, this.at) + this.escaped();
        copied = this.at;
      } else {
        this.at += 1;
      }
    }
  }

  private escaped(): string {
    const mark = this.text[this.at + 1] ?? "";
    if (mark === "u") {
      const digits = this.text.slice(this.at + 2, this.at + 6);
      if (!/^[0-9a-fA-F]{4}$/.test(digits)) this.fail("\\u needs four hexadecimal digits");
      this.at += 6;
      return String.fromCharCode(Number.parseInt(digits, 16));
    }
    const character = Object.hasOwn(ESCAPES, mark) ? ESCAPES[mark] : undefined;
    if (character === undefined) this.fail("this backslash begins nothing that JSON knows");
    this.at += 2;
    return character;
  }

  private skipSpace(): void {
    while (this.at < this.text.length) {
      const code = this.text.charCodeAt(this.at);
      if (code !== 0x20 && code !== 0x0a && code !== 0x0d && code !== 0x09) return;
      this.at += 1;
    }
  }

  private refuseDepth(level: number): void {
    if (level > JSON_MAX_LEVELS) this.fail(`more than ${JSON_MAX_LEVELS} levels are nested`);
  }

  private fail(what: string): never {
    const before = this.text.slice(0, this.at).split(/\r\n|\n|\r/);
    const line = before.length;
    const position = (before.at(-1) ?? "").length + 1;
    throw new StrictJsonError(`Line ${line}, position ${position}: ${what}.`, { line, position });
  }
}

/** A key in quotes, shortened so that a sentence stays a sentence. */
export function shown(key: string): string {
  const short = key.length > 60 ? `${key.slice(0, 60)}…` : key;
  return JSON.stringify(short);
}
