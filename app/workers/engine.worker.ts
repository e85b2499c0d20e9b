import { expose, transfer } from "comlink";
import { createSHA256 } from "hash-wasm";
import {
  analyze,
  findWindows,
  prepare,
  type RecordingInput,
  readRecording,
  viewWindow,
} from "#app/engine/pipeline.ts";
import type {
  Prepared,
  PreparedAxis,
  Protocol,
  Stretch,
  WindowChoice,
  WindowDrawing,
} from "#app/engine/types.ts";
import type { EngineApi, EngineProblemCode, RecordingSource } from "./engine.api.ts";
import { lookAtHead, readWhole } from "./incoming-file.ts";
import { firstAtOrAfter, nearestSample, thinColumns, withoutMissingStamps } from "./thin.ts";

const DEG_PER_RAD = 180 / Math.PI;

/** What analysing needs; all of it can be given to another worker. */
interface Readings {
  recording: RecordingInput;
  protocol: Protocol;
  protocolSha256: string;
}

/** What drawing needs besides. */
interface Bench extends Readings {
  prepared: Prepared;
  /** Stamps without holes, s. */
  timeS: Float64Array;
  /** Samples before which lines break. */
  breaks: number[];
  /** Of each axis in degrees, made once. */
  degrees: Map<string, { angle: Float64Array; velocity: Float64Array }>;
}

let readings: Readings | null = null;
let bench: Bench | null = null;

const api: EngineApi = {
  async open(source, onProgress) {
    const bytes = await fetchBytes(source, (bytesRead) =>
      onProgress({ step: "fetching", bytesRead, bytesTotal: source.sizeBytes }),
    );
    const whole = { bytesRead: bytes.length, bytesTotal: bytes.length };
    onProgress({ step: "reading", ...whole });
    const signals = readRecording(bytes, source.protocol);
    onProgress({ step: "preparing", ...whole });
    const prepared = prepare(signals, source.protocol);
    readings = {
      recording: { file: source.fileName, sha256: source.sha256, signals },
      protocol: source.protocol,
      protocolSha256: source.protocolSha256,
    };
    const timeS = withoutMissingStamps(signals.timeS, signals.rateHz);
    bench = {
      ...readings,
      prepared,
      timeS,
      breaks: [...signals.gapBefore],
      degrees: new Map(
        prepared.axes.map((axis) => [
          axis.name,
          {
            angle: axis.angleRad.map((rad) => rad * DEG_PER_RAD),
            velocity: axis.velocityRadPerS.map((rad) => rad * DEG_PER_RAD),
          },
        ]),
      ),
    };
    return {
      samples: signals.samples,
      rateHz: signals.rateHz,
      startS: timeS[0] as number,
      endS: timeS[timeS.length - 1] as number,
      flags: signals.flags,
      found: findWindows(prepared, source.protocol),
      emg: signals.emg.map(({ muscle, unit }) => ({ muscle, unit })),
    };
  },

  stretch({ axis, fromS, toS, pixels }) {
    const { prepared, timeS, breaks, degrees } = onTheBench();
    const columns = axisOf(prepared, axis);
    const { angle, velocity } = degrees.get(axis) as {
      angle: Float64Array;
      velocity: Float64Array;
    };
    // One sample more at each end, so that the lines run to the edges.
    const range = {
      from: firstAtOrAfter(timeS, fromS) - 1,
      to: firstAtOrAfter(timeS, toS) + 2,
      pixels,
    };
    const emg = prepared.signals.emg.map(({ channel }) => channel.si);
    const thin = thinColumns(timeS, [angle, velocity, columns.torqueNm, ...emg], range, breaks);
    const [angleDeg, velocityDegPerS, torqueNm, ...emgThin] = thin.columns as [
      Float64Array,
      Float64Array,
      Float64Array,
      ...Float64Array[],
    ];
    const stretch: Stretch = {
      axis,
      timeS: thin.timeS,
      angleDeg,
      velocityDegPerS,
      torqueNm,
      emg: emgThin,
    };
    return transfer(stretch, [thin.timeS.buffer, ...thin.columns.map((column) => column.buffer)]);
  },

  view({ choice, choices, pixels }) {
    const drawing = draw(onTheBench(), choice, choices, pixels);
    return transfer(drawing, buffersOf(drawing));
  },

  viewAll({ choices, pixels }) {
    const held = onTheBench();
    const drawings = choices.map((choice) =>
      draw(
        held,
        choice,
        choices.filter((other) => other.axis === choice.axis),
        pixels,
      ),
    );
    return transfer(drawings, drawings.flatMap(buffersOf));
  },

  handOver(port) {
    port.postMessage((onTheBench() satisfies Readings) && readings);
    port.close();
  },

  takeOver(port) {
    return new Promise((resolve) => {
      port.onmessage = (event: MessageEvent<Readings>) => {
        readings = event.data;
        port.close();
        resolve();
      };
    });
  },

  analyze(windows) {
    if (readings === null) throw new RangeError("No recording is open.");
    return analyze({
      protocol: readings.protocol,
      protocolSha256: readings.protocolSha256,
      recordings: [readings.recording],
      rig: [],
      windows,
    });
  },

  async hash(file, onProgress) {
    const hasher = await createSHA256();
    let bytesRead = 0;
    for await (const piece of pieces(file.stream())) {
      hasher.update(piece);
      bytesRead += piece.length;
      onProgress(bytesRead);
    }
    return hasher.digest();
  },

  lookAtHead,
  readWhole,
};

expose(api);

function onTheBench(): Bench {
  if (bench === null) throw new RangeError("No recording is open.");
  return bench;
}

function axisOf(prepared: Prepared, name: string): PreparedAxis {
  const axis = prepared.axes.find((candidate) => candidate.name === name);
  if (axis === undefined) throw new RangeError(`The recording has no axis ${name}.`);
  return axis;
}

/** One window's fit, with the lines that a screen draws of it. */
function draw(
  { prepared, protocol, timeS, degrees }: Bench,
  choice: WindowChoice,
  choices: readonly WindowChoice[],
  pixels: number,
): WindowDrawing {
  const { window, trace } = viewWindow(prepared, protocol, choice, [...choices]);
  if (trace === null) return { window, share: null, lines: null };
  const { rateHz } = prepared.signals;
  const from =
    nearestSample(timeS, window.onset_s) + Math.round((window.window_ms[0] * rateHz) / 1000);
  const to = from + trace.timeMs.length;
  const measured = axisOf(prepared, window.axis).torqueNm.slice(from, to);
  const angle = degrees.get(window.axis)?.angle.slice(from, to) as Float64Array;
  const baselineDeg = trace.baseline.angleRad * DEG_PER_RAD;
  const columns = [
    angle.map((deg) => deg - baselineDeg),
    measured,
    // The residual is the same with and without the background and the rig's own torque.
    measured.map((torque, i) => torque - (trace.residualNm[i] as number)),
    trace.residualNm,
    trace.termsNm.K,
    trace.termsNm.B,
    trace.termsNm.I,
  ];
  const thin = thinColumns(timeS.slice(from, to), columns, { from: 0, to: to - from, pixels });
  const [angleDeg, measuredNm, modelledNm, residualNm, K, B, I] = thin.columns as [
    Float64Array,
    Float64Array,
    Float64Array,
    Float64Array,
    Float64Array,
    Float64Array,
    Float64Array,
  ];
  return {
    window,
    share: trace.share,
    lines: {
      timeS: thin.timeS,
      angleDeg,
      measuredNm,
      modelledNm,
      residualNm,
      termsNm: { K, B, I },
    },
  };
}

function buffersOf({ lines }: WindowDrawing): ArrayBufferLike[] {
  if (lines === null) return [];
  const { timeS, angleDeg, measuredNm, modelledNm, residualNm, termsNm } = lines;
  const columns = [timeS, angleDeg, measuredNm, modelledNm, residualNm];
  return [...columns, termsNm.K, termsNm.B, termsNm.I].map((column) => column.buffer);
}

/** An error whose code survives the way to the page. */
function problem(code: EngineProblemCode, message: string): Error {
  const error = new Error(message);
  error.name = code;
  return error;
}

/** The raw file, hashed while it comes in. @throws Error with an EngineProblemCode as its name */
async function fetchBytes(
  source: RecordingSource,
  onProgress: (bytesRead: number) => void,
): Promise<Uint8Array> {
  let response: Response;
  try {
    response = await fetch(source.url, { redirect: "manual", credentials: "same-origin" });
  } catch {
    throw problem("unreachable", `${source.fileName} could not be fetched: no connection.`);
  }
  if (response.type === "opaqueredirect" || response.status === 401) {
    throw problem("signed_out", "You are no longer signed in.");
  }
  if (response.status === 404) {
    throw problem("missing", `${source.fileName} is not in the lab's storage.`);
  }
  if (!response.ok || response.body === null) {
    throw problem(
      "unreachable",
      `${source.fileName} could not be fetched: the server answered ${response.status}.`,
    );
  }
  const hasher = await createSHA256();
  const bytes = new Uint8Array(source.sizeBytes);
  let length = 0;
  try {
    for await (const piece of pieces(response.body)) {
      if (length + piece.length > bytes.length) throw tampered(source);
      bytes.set(piece, length);
      length += piece.length;
      hasher.update(piece);
      onProgress(length);
    }
  } catch (error) {
    if (error instanceof Error && error.name === "changed") throw error;
    throw problem("unreachable", `The connection broke while ${source.fileName} was fetched.`);
  }
  if (length !== bytes.length || hasher.digest() !== source.sha256) throw tampered(source);
  return bytes;
}

function tampered(source: RecordingSource): Error {
  return problem(
    "changed",
    `The bytes of ${source.fileName} are not those that were taken in: their SHA-256 differs.`,
  );
}

/** A stream's pieces; not every browser lets a stream be looped over. */
async function* pieces(stream: ReadableStream<Uint8Array>): AsyncGenerator<Uint8Array> {
  const reader = stream.getReader();
  try {
    for (;;) {
      const { done, value } = await reader.read();
      if (done) return;
      yield value;
    }
  } finally {
    reader.releaseLock();
  }
}
