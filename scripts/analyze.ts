/**
 * The engine without a screen:
 *
 *   npm run --silent analyze -- RECORDING... --protocol PROTOCOL.json
 *       [--rig EMPTY_RECORDING...] [--windows WINDOWS.json] [--out FILE]
 *
 * One JSON document on standard output (or in FILE), warnings on standard error. Exit 0: analysed;
 * 2: bad usage, protocol or windows; 3: a recording cannot be read. Where the exit is not 0 the last
 * line of standard error says why: `analyze: NAME: sentence`.
 */
import { constants } from "node:buffer";
import { createHash } from "node:crypto";
import {
  closeSync,
  fstatSync,
  openSync,
  readSync,
  realpathSync,
  renameSync,
  rmSync,
  statSync,
  writeFileSync,
} from "node:fs";
import { dirname } from "node:path";
import { fileURLToPath } from "node:url";
import { ProtocolError, parseProtocol } from "#app/domain/protocol.ts";
import { parseWindows, WindowsError } from "#app/domain/window.ts";
import { EngineError } from "#app/engine/errors.ts";
import type { RecordingInput } from "#app/engine/pipeline.ts";
import type { Protocol, Result, WindowsDocument } from "#app/engine/types.ts";

const MIB = 1024 * 1024;
/** More than a protocol or a list of windows may have; its reader says so. */
const MAX_DOCUMENT_BYTES = MIB + 1;
/** What comes through a pipe may have no end. */
const MAX_PIPED_BYTES = 256 * MIB;
/** Most that is read, or hashed, by one call. */
const PART_BYTES = 64 * MIB;
const STANDARD_INPUT = "-";

/** Why nothing is analysed: exit, what is to blame, and a sentence. */
class Refusal extends Error {
  readonly exit: 2 | 3;
  readonly blamed: string;

  constructor(exit: 2 | 3, blamed: string, sentence: string) {
    super(sentence);
    this.exit = exit;
    this.blamed = blamed;
  }
}

// ---------------------------------------------------------------- arguments

interface Arguments {
  recordings: string[];
  rig: string[];
  protocol: string;
  windows: string | null;
  out: string | null;
}

const SINGLE_OPTIONS = ["--protocol", "--windows", "--out"] as const;
type SingleOption = (typeof SINGLE_OPTIONS)[number];
const USAGE =
  "give recordings and --protocol PROTOCOL.json; --rig EMPTY_RECORDING..., --windows WINDOWS.json and --out FILE if wished.";

/** @throws Refusal */
function readArguments(given: readonly string[]): Arguments {
  const recordings: string[] = [];
  const rig: string[] = [];
  const single = new Map<SingleOption, string>();
  let target = recordings;
  let hasRig = false;

  const queue = [...given];
  while (queue.length > 0) {
    const argument = queue.shift() ?? "";
    if (argument === "--") {
      recordings.push(...queue.splice(0));
      break;
    }
    if (argument === STANDARD_INPUT || !argument.startsWith("-")) {
      if (argument === "") throw new Refusal(2, "arguments", "A file name is empty.");
      target.push(argument);
      continue;
    }
    target = recordings;
    const [name = "", ...rest] = argument.split("=");
    if (name === "--rig") {
      hasRig = true;
      target = rig;
      if (rest.length > 0) rig.push(rest.join("="));
      continue;
    }
    const option = SINGLE_OPTIONS.find((each) => each === name);
    if (option === undefined) throw new Refusal(2, argument, `This is not an option; ${USAGE}`);
    if (single.has(option)) throw new Refusal(2, option, "This option stands twice; give it once.");
    const value = rest.length > 0 ? rest.join("=") : queue.shift();
    if (value === undefined || value === "" || (rest.length === 0 && value.startsWith("-"))) {
      throw new Refusal(2, option, "The name of a file must follow this option.");
    }
    single.set(option, value);
  }

  const protocol = single.get("--protocol");
  if (protocol === undefined)
    throw new Refusal(2, "--protocol", `The protocol is missing; ${USAGE}`);
  if (recordings.length === 0) throw new Refusal(2, "RECORDING", `No recording is named; ${USAGE}`);
  if (hasRig && rig.length === 0) {
    throw new Refusal(
      2,
      "--rig",
      "Name at least one recording of the empty rig behind this option.",
    );
  }
  if ([...recordings, ...rig].filter((file) => file === STANDARD_INPUT).length > 1) {
    throw new Refusal(2, STANDARD_INPUT, "Standard input can be read only once.");
  }
  return {
    recordings,
    rig,
    protocol,
    windows: single.get("--windows") ?? null,
    out: single.get("--out") ?? null,
  };
}

// ---------------------------------------------------------------- reading

/**
 * The bytes of a file or of standard input.
 *
 * @param maxBytes  of a file, and of what is piped
 * @param start  is shown the first bytes where there are more than so many, before the rest is read
 * @throws Refusal, naming the file as given
 */
function readBytes(
  file: string,
  exit: 2 | 3,
  maxBytes: { file: number; pipe: number },
  start: { bytes: number; check: (part: Uint8Array) => void } | null = null,
): Uint8Array {
  let descriptor: number | null = null;
  try {
    descriptor = file === STANDARD_INPUT ? 0 : openSync(file, "r");
    const facts = fstatSync(descriptor);
    if (facts.isDirectory()) throw new Refusal(exit, file, "This is a folder, not a file.");
    const most = facts.isFile() ? maxBytes.file : maxBytes.pipe;
    if (facts.size > most) throw tooLarge(file, exit, most);
    const chunks: Buffer[] = [];
    let total = 0;
    for (;;) {
      // One byte more than the file has: it is full only where the file has grown meanwhile.
      const chunk = Buffer.allocUnsafeSlow(
        Math.max(total === 0 ? facts.size + 1 : MIB, start?.bytes ?? MIB),
      );
      let length = 0;
      while (length < chunk.length) {
        const toStart = start !== null && total === 0 && length < start.bytes;
        const wanted = (toStart ? start.bytes : chunk.length) - length;
        const part = readPart(descriptor, chunk, length, Math.min(wanted, PART_BYTES));
        if (part === 0) break;
        length += part;
        if (total + length > most) throw tooLarge(file, exit, most);
        if (toStart && length === start.bytes) start.check(chunk.subarray(0, length));
      }
      chunks.push(chunk.subarray(0, length));
      total += length;
      if (length < chunk.length) break;
    }
    const [only] = chunks;
    return chunks.length === 1 && only !== undefined ? only : Buffer.concat(chunks, total);
  } catch (error) {
    if (error instanceof Refusal || error instanceof EngineError) throw error;
    throw new Refusal(exit, file, fileSentence(error));
  } finally {
    if (descriptor !== null && descriptor !== 0) closeSync(descriptor);
  }
}

function tooLarge(file: string, exit: 2 | 3, maxBytes: number): Refusal {
  const size = `${Math.floor(maxBytes / MIB)} MiB`;
  return new Refusal(
    exit,
    file,
    maxBytes === MAX_PIPED_BYTES
      ? `More than ${size} came through the pipe; give the recording as a file.`
      : `The file is larger than ${size}, the most that can be read; it is not read.`,
  );
}

/** One read; a terminal or pipe that has nothing yet is asked again, a closed one is at its end. */
function readPart(descriptor: number, chunk: Buffer, offset: number, length: number): number {
  while (true) {
    try {
      return readSync(descriptor, chunk, offset, length, null);
    } catch (error) {
      if (codeOf(error) === "EOF") return 0;
      if (codeOf(error) !== "EAGAIN") throw error;
      Atomics.wait(new Int32Array(new SharedArrayBuffer(4)), 0, 0, 5);
    }
  }
}

function codeOf(error: unknown): string | null {
  if (!(error instanceof Error) || !("code" in error)) return null;
  return typeof error.code === "string" ? error.code : null;
}

const FILE_SENTENCES: Record<string, string> = {
  ENOENT: "There is no such file.",
  ENOTDIR: "There is no such file.",
  EISDIR: "This is a folder, not a file.",
  EACCES: "This account may not use the file.",
  EPERM: "This account may not use the file.",
  EROFS: "The disk can only be read.",
  ENOSPC: "The disk is full.",
  ENAMETOOLONG: "The name is too long for a file.",
};

function fileSentence(error: unknown): string {
  if (isOutOfMemory(error)) return NO_MEMORY;
  const code = codeOf(error);
  return FILE_SENTENCES[code ?? ""] ?? `The file cannot be used (${code ?? String(error)}).`;
}

function readText(file: string): { text: string; sha256: string } {
  const bytes = readBytes(file, 2, { file: MAX_DOCUMENT_BYTES, pipe: MAX_DOCUMENT_BYTES });
  try {
    return { text: new TextDecoder("utf-8", { fatal: true }).decode(bytes), sha256: sha256(bytes) };
  } catch {
    throw new Refusal(2, file, "The file is not UTF-8 text.");
  }
}

function sha256(bytes: Uint8Array): string {
  const hash = createHash("sha256");
  for (let at = 0; at < bytes.length; at += PART_BYTES) {
    hash.update(bytes.subarray(at, at + PART_BYTES));
  }
  return hash.digest("hex");
}

function readProtocolFile(file: string): { protocol: Protocol; sha256: string } {
  const { text, sha256 } = readText(file);
  try {
    return { protocol: parseProtocol(text), sha256 };
  } catch (error) {
    if (!(error instanceof ProtocolError)) throw error;
    throw new Refusal(2, error.field ?? atLine(file, error.line), error.message);
  }
}

function readWindowsFile(file: string): WindowsDocument {
  const { text } = readText(file);
  try {
    return parseWindows(text);
  } catch (error) {
    if (!(error instanceof WindowsError)) throw error;
    throw new Refusal(2, atLine(file, error.line), error.message);
  }
}

function atLine(file: string, line: number | null): string {
  return line === null ? file : `${file}:${line}`;
}

type Engine = typeof import("#app/engine/pipeline.ts");

/** Reads recordings one after the other; `seen` holds the names of all files by their hash. */
function readRecordings(
  engine: Engine,
  files: readonly string[],
  protocol: Protocol,
  seen: Map<string, string>,
): RecordingInput[] {
  const maxBytes = { file: constants.MAX_LENGTH - 1, pipe: MAX_PIPED_BYTES };
  const start = {
    bytes: engine.FIRST_PART_BYTES,
    check: (part: Uint8Array) => engine.checkStart(part, protocol),
  };
  return files.map((file) => {
    try {
      const bytes = readBytes(file, 3, maxBytes, start);
      const hash = sha256(bytes);
      const twin = seen.get(hash);
      if (twin !== undefined) {
        throw new Refusal(
          2,
          file,
          `This is the same file as ${oneLine(twin)}; it would count twice.`,
        );
      }
      seen.set(hash, file);
      return { file, sha256: hash, signals: engine.readRecording(bytes, protocol) };
    } catch (error) {
      throw refusalOf(error, file);
    }
  });
}

/** What the engine says about a file, as the command says it. */
function refusalOf(error: unknown, file: string): unknown {
  if (error instanceof EngineError) {
    return error.name === "protocol"
      ? new Refusal(2, error.field ?? file, error.message)
      : new Refusal(3, atLine(file, error.line), error.message);
  }
  return isOutOfMemory(error) ? new Refusal(3, file, NO_MEMORY) : error;
}

const NO_MEMORY = "The recording does not fit into memory.";

/** What JavaScript throws where an array or a text cannot be made. */
function isOutOfMemory(error: unknown): boolean {
  return error instanceof RangeError && /array|allocation|string length/i.test(error.message);
}

// ---------------------------------------------------------------- writing

/** Refuses a place that cannot be written to, or that would take the place of an input. */
function checkOut(out: string, inputs: readonly string[]): void {
  let isThere = false;
  try {
    if (!statSync(dirname(out)).isDirectory())
      throw new Refusal(2, out, "Its folder is no folder.");
    isThere = statSync(out, { throwIfNoEntry: false })?.isFile() ?? false;
    if (statSync(out, { throwIfNoEntry: false })?.isDirectory()) {
      throw new Refusal(2, out, "This is a folder; name a file in it.");
    }
  } catch (error) {
    if (error instanceof Refusal) throw error;
    throw new Refusal(
      2,
      out,
      codeOf(error) === "ENOENT" ? "The folder for this file does not exist." : fileSentence(error),
    );
  }
  const isInput = (file: string) =>
    file !== STANDARD_INPUT &&
    statSync(file, { throwIfNoEntry: false }) !== undefined &&
    realpathSync(file) === realpathSync(out);
  if (isThere && inputs.some(isInput)) {
    throw new Refusal(2, out, "The result would take the place of a file that is read.");
  }
}

/** Writes FILE in one step: whoever looks sees the old one, none, or the whole of the new one. */
function writeOut(out: string, text: string): void {
  const facts = statSync(out, { throwIfNoEntry: false });
  // A link stays one: what it points to is replaced.
  const place = facts?.isFile() === true ? realpathSync(out) : out;
  const part = `${place}.${process.pid}.part`;
  try {
    if (facts?.isFile() === false) {
      writeFileSync(out, text);
      return;
    }
    writeFileSync(part, text, { flag: "wx" });
    renameSync(part, place);
  } catch (error) {
    rmSync(part, { force: true });
    throw new Refusal(2, out, fileSentence(error));
  }
}

/** Refuses windows of other recordings only, of an axis that is not there, and two that begin at the same sample. */
async function checkWindows(
  file: string,
  { windows }: WindowsDocument,
  protocol: Protocol,
  recordings: readonly RecordingInput[],
): Promise<void> {
  const { nearestSample } = await import("#app/engine/windows/nearest-sample.ts");
  const seen = new Set<string>();
  let named = 0;
  for (const [index, { recording_sha256, axis, onset_s }] of windows.entries()) {
    const recording = recordings.find(({ sha256 }) => sha256 === recording_sha256);
    if (recording === undefined) continue;
    named += 1;
    if (!protocol.axes.some(({ name }) => name === axis)) {
      const sentence = `windows.${index}.axis: The protocol has no axis of this name.`;
      throw new Refusal(2, file, sentence);
    }
    const key = `${recording_sha256} ${nearestSample(recording.signals.timeS, onset_s)} ${axis}`;
    if (seen.has(key)) {
      throw new Refusal(
        2,
        file,
        `windows.${index}: Another window of ${axis} begins at the same sample; it would count twice.`,
      );
    }
    seen.add(key);
  }
  if (named === 0)
    throw new Refusal(2, file, "None of its windows is of a recording that is given.");
}

// ---------------------------------------------------------------- the command

async function analyzeFiles(
  given: readonly string[],
): Promise<{ result: Result; out: string | null }> {
  const files = readArguments(given);
  const { protocol, sha256: protocolSha256 } = readProtocolFile(files.protocol);
  const windows = files.windows === null ? null : readWindowsFile(files.windows);
  if (files.out !== null) {
    const documents = [files.protocol, ...(files.windows === null ? [] : [files.windows])];
    checkOut(files.out, [...files.recordings, ...files.rig, ...documents]);
  }

  // Loaded only now: a wrong call or protocol is refused without waiting for the engine.
  const engine = await import("#app/engine/pipeline.ts");
  const seen = new Map<string, string>();
  const recordings = readRecordings(engine, files.recordings, protocol, seen);
  const rig = readRecordings(engine, files.rig, protocol, seen);
  if (files.windows !== null && windows !== null) {
    await checkWindows(files.windows, windows, protocol, [...recordings, ...rig]);
  }
  try {
    const result = engine.analyze({ protocol, protocolSha256, recordings, rig, windows });
    return { result, out: files.out };
  } catch (error) {
    throw refusalOf(error, files.recordings[0] ?? "");
  }
}

export interface Answer {
  exit: 0 | 2 | 3;
  /** The document; empty where it went to FILE or nothing was analysed. */
  stdout: string;
  /** Whole lines; where the exit is not 0 the last one is the reason. */
  stderr: string;
}

/** The whole command but for its streams: reads the files that are named, and writes FILE. */
export async function answer(given: readonly string[]): Promise<Answer> {
  try {
    const { result, out } = await analyzeFiles(given);
    const text = `${JSON.stringify(result)}\n`;
    if (out !== null) writeOut(out, text);
    const warnings = result.recordings.flatMap(({ file, flags }) =>
      flags.map((flag) => line(file, flag.text)),
    );
    return { exit: 0, stdout: out === null ? text : "", stderr: warnings.join("") };
  } catch (error) {
    if (error instanceof Refusal) {
      return { exit: error.exit, stdout: "", stderr: line(error.blamed, error.message) };
    }
    const reason = error instanceof Error ? error.message : String(error);
    return { exit: 3, stdout: "", stderr: line("engine", `The analysis stopped: ${reason}.`) };
  }
}

function line(name: string, sentence: string): string {
  return `analyze: ${oneLine(name)}: ${oneLine(sentence)}\n`;
}

function oneLine(text: string): string {
  return text.replace(/\s*[\r\n\u2028\u2029]+\s*/g, " ");
}

if (
  process.argv[1] !== undefined &&
  realpathSync(process.argv[1]) === fileURLToPath(import.meta.url)
) {
  const { exit, stdout, stderr } = await answer(process.argv.slice(2));
  process.exitCode = exit;
  // A reader that has seen enough (`| head`) closes the pipe; that is no failure of the analysis.
  process.stdout.on("error", () => process.exit(exit));
  process.stdout.write(stdout);
  process.stderr.write(stderr);
}
