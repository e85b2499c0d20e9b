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

/** Larger recordings are refused before they are read: they would not fit into 1 GB on the way. */
const MAX_RECORDING_BYTES = 256 * 1024 * 1024;
/** More than a protocol or a list of windows may have; its reader says so. */
const MAX_DOCUMENT_BYTES = 1024 * 1024 + 1;
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

/** The bytes of a file or of standard input. @throws Refusal, naming the file as given */
function readBytes(file: string, exit: 2 | 3, maxBytes: number): Uint8Array {
  const tooLarge = () =>
    new Refusal(
      exit,
      file,
      `The file is larger than ${Math.floor(maxBytes / 1024 / 1024)} MiB; it is not read.`,
    );
  let descriptor: number | null = null;
  try {
    descriptor = file === STANDARD_INPUT ? 0 : openSync(file, "r");
    const facts = fstatSync(descriptor);
    if (facts.isDirectory()) throw new Refusal(exit, file, "This is a folder, not a file.");
    if (facts.isFile() && facts.size > maxBytes) throw tooLarge();
    const chunks: Buffer[] = [];
    let total = 0;
    while (true) {
      const chunk = Buffer.allocUnsafeSlow(facts.isFile() ? facts.size - total + 1 : 1024 * 1024);
      const length = readPart(descriptor, chunk);
      if (length === 0) break;
      total += length;
      if (total > maxBytes) throw tooLarge();
      chunks.push(chunk.subarray(0, length));
    }
    const [only] = chunks;
    return chunks.length === 1 && only !== undefined ? only : Buffer.concat(chunks, total);
  } catch (error) {
    if (error instanceof Refusal) throw error;
    throw new Refusal(exit, file, fileSentence(error));
  } finally {
    if (descriptor !== null && descriptor !== 0) closeSync(descriptor);
  }
}

/** One read; a terminal or pipe that has nothing yet is asked again, a closed one is at its end. */
function readPart(descriptor: number, chunk: Buffer): number {
  while (true) {
    try {
      return readSync(descriptor, chunk, 0, chunk.length, null);
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
  const code = codeOf(error);
  return FILE_SENTENCES[code ?? ""] ?? `The file cannot be used (${code ?? String(error)}).`;
}

function readText(file: string): { text: string; sha256: string } {
  const bytes = readBytes(file, 2, MAX_DOCUMENT_BYTES);
  try {
    return { text: new TextDecoder("utf-8", { fatal: true }).decode(bytes), sha256: sha256(bytes) };
  } catch {
    throw new Refusal(2, file, "The file is not UTF-8 text.");
  }
}

function sha256(bytes: Uint8Array): string {
  return createHash("sha256").update(bytes).digest("hex");
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

function readWindowsFile(file: string, protocol: Protocol): WindowsDocument {
  const { text } = readText(file);
  try {
    const document = parseWindows(text);
    const axes = protocol.axes.map((axis) => axis.name);
    const foreign = document.windows.findIndex((window) => !axes.includes(window.axis));
    if (foreign >= 0) {
      throw new WindowsError(`windows.${foreign}.axis: The protocol has no axis of this name.`);
    }
    return document;
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
  return files.map((file) => {
    const bytes = readBytes(file, 3, MAX_RECORDING_BYTES);
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
    try {
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
  // The one thing that JavaScript throws for a recording that is too large for its arrays.
  if (error instanceof RangeError && /array|allocation|string length/i.test(error.message)) {
    return new Refusal(3, file, "The recording does not fit into memory.");
  }
  return error;
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
  const isDevice = statSync(out, { throwIfNoEntry: false })?.isFile() === false;
  const part = `${out}.${process.pid}.part`;
  try {
    if (isDevice) {
      writeFileSync(out, text);
      return;
    }
    writeFileSync(part, text, { flag: "wx" });
    renameSync(part, out);
  } catch (error) {
    rmSync(part, { force: true });
    throw new Refusal(2, out, fileSentence(error));
  }
}

/** Refuses windows of other recordings only, and two that begin at the same sample. */
async function checkWindows(
  file: string,
  { windows }: WindowsDocument,
  recordings: readonly RecordingInput[],
): Promise<void> {
  const { nearestSample } = await import("#app/engine/windows/nearest-sample.ts");
  const seen = new Set<string>();
  let named = 0;
  for (const [index, { recording_sha256, axis, onset_s }] of windows.entries()) {
    const recording = recordings.find(({ sha256 }) => sha256 === recording_sha256);
    if (recording === undefined) continue;
    named += 1;
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
  const windows = files.windows === null ? null : readWindowsFile(files.windows, protocol);
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
    await checkWindows(files.windows, windows, recordings);
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
