import { describe, expect, it } from "vitest";
import {
  type Finish,
  type FinishAnswer,
  SendError,
  type SendPort,
  type Step,
  sendFile,
  type Upload,
} from "./send-file.ts";

const FINISH: Finish = {
  participantId: "p",
  conditionId: "c",
  postureId: "s",
  day: "2026-12-01",
  map: {
    table: { separator: "auto", decimal: "auto", header_row: "auto" },
    time: { column: "t", unit: "s" },
    axes: [],
    trigger: null,
    emg: [],
  },
};

const LOST = new SendError("The connection broke.", "soon");

/** A server that takes parts of 4 bytes and can be told to fail. */
function makePort(script: {
  /** One answer for each PUT in turn: a failure, or none. */
  puts?: (Error | null)[];
  finishes?: (FinishAnswer | Error)[];
  looks?: FinishAnswer[];
}) {
  const calls: string[] = [];
  const stored = new Map<number, string>();
  let age = 0;
  const puts = [...(script.puts ?? [])];
  const finishes = [...(script.finishes ?? [])];
  const looks = [...(script.looks ?? [])];
  const address = (number: number) => ({ number, url: `part ${number} age ${age}` });
  const port: SendPort = {
    open: async ({ sizeBytes }) => {
      calls.push("open");
      return {
        status: "open",
        uploadId: "u",
        partSizeBytes: 4,
        parts: Array.from({ length: Math.ceil(sizeBytes / 4) }, (_, i) => address(i + 1)),
      };
    },
    renew: async (_, numbers) => {
      age += 1;
      calls.push(`renew ${numbers.join(" ")}`);
      return { status: "open", parts: numbers.map(address) };
    },
    putPart: async (url, bytes, onSent) => {
      calls.push(`put ${url}`);
      const failure = puts.shift();
      if (failure) throw failure;
      onSent(bytes.size);
      const number = Number(url.split(" ")[1]);
      stored.set(number, await bytes.text());
      return `etag-${number}`;
    },
    finish: async (_, { parts }) => {
      calls.push(`finish ${parts.map(({ number, etag }) => `${number}=${etag}`).join(" ")}`);
      const answer = finishes.shift() ?? { status: "ready", recordingId: "r" };
      if (answer instanceof Error) throw answer;
      return answer;
    },
    look: async () => {
      calls.push("look");
      return looks.shift() ?? { status: "ready", recordingId: "r" };
    },
    cancel: async () => {
      calls.push("cancel");
    },
  };
  return { port, calls, stored };
}

function start(port: SendPort, extra: { upload?: Upload | null; signal?: AbortSignal } = {}) {
  const steps: Step[] = [];
  const pauses: number[] = [];
  const kept: (Upload | null)[] = [];
  const sent = sendFile({
    port,
    file: { name: "a.csv", sizeBytes: 10, sha256: "00", bytes: new Blob(["0123456789"]) },
    finish: () => FINISH,
    upload: extra.upload ?? null,
    onUpload: (upload) => kept.push(upload),
    onStep: (step) => steps.push(step),
    signal: extra.signal ?? new AbortController().signal,
    wait: async (ms) => {
      pauses.push(ms);
    },
  });
  return { sent, steps, pauses, kept };
}

describe("sendFile", () => {
  it("sends the bytes unchanged in parts, says how far it is, and ends with the recording", async () => {
    const { port, calls, stored } = makePort({});
    const { sent, steps } = start(port);
    expect(await sent).toEqual({ status: "ready", recordingId: "r" });
    expect([...stored.values()]).toEqual(["0123", "4567", "89"]);
    expect(calls.at(-1)).toBe("finish 1=etag-1 2=etag-2 3=etag-3");
    expect(steps.flatMap((step) => (step.step === "sending" ? [step.sentBytes] : []))).toEqual([
      0, 4, 8, 10,
    ]);
    expect(steps.at(-1)).toEqual({ step: "verifying" });
  });

  it("takes a part that broke up again with a fresh address, and keeps the parts that arrived", async () => {
    const { port, calls } = makePort({ puts: [null, LOST] });
    expect((await start(port).sent).status).toBe("ready");
    expect(calls).toEqual([
      "open",
      "put part 1 age 0",
      "put part 2 age 0",
      "renew 2 3",
      "put part 2 age 1",
      "put part 3 age 1",
      "finish 1=etag-1 2=etag-2 3=etag-3",
    ]);
  });

  it("asks a person after four tries, and goes on from there with what arrived", async () => {
    const first = makePort({ puts: [null, LOST, LOST, LOST, LOST] });
    const broken = start(first.port);
    expect(await broken.sent).toEqual({ status: "broken", sentence: "The connection broke." });
    expect(broken.pauses).toEqual([1000, 3000, 9000]);
    const upload = broken.kept.at(-1) ?? null;
    expect([...(upload?.arrived ?? [])]).toEqual([[1, "etag-1"]]);

    const second = makePort({});
    expect((await start(second.port, { upload }).sent).status).toBe("ready");
    expect(second.calls).toEqual([
      "renew 2 3",
      "put part 2 age 1",
      "put part 3 age 1",
      "finish 1=etag-1 2=etag-2 3=etag-3",
    ]);
  });

  it("looks again until the server has verified its copy", async () => {
    const { port, calls } = makePort({
      finishes: [{ status: "verifying", recordingId: "r" }],
      looks: [
        { status: "verifying", recordingId: "r" },
        { status: "refused", sentence: "a.csv, line 7: no." },
      ],
    });
    expect(await start(port).sent).toEqual({ status: "refused", sentence: "a.csv, line 7: no." });
    expect(calls.filter((call) => call === "look")).toHaveLength(2);
  });

  it("asks again where the answer to finishing was lost", async () => {
    const { port } = makePort({ finishes: [LOST] });
    expect((await start(port).sent).status).toBe("ready");
  });

  it("sends everything once more where the storage lacks parts, and then asks a person", async () => {
    const incomplete: FinishAnswer = { status: "incomplete", sentence: "Parts are missing." };
    const once = makePort({ finishes: [incomplete] });
    expect((await start(once.port).sent).status).toBe("ready");
    expect(once.calls.filter((call) => call.startsWith("put"))).toHaveLength(6);

    const twice = makePort({ finishes: [incomplete, incomplete] });
    expect(await start(twice.port).sent).toEqual({
      status: "broken",
      sentence: "Parts are missing.",
    });
  });

  it("says at once what the server refuses", async () => {
    const refusal = new SendError("Not for you.", "never");
    const { port, calls } = makePort({ finishes: [refusal] });
    expect(await start(port).sent).toEqual({ status: "refused", sentence: "Not for you." });
    expect(calls.filter((call) => call.startsWith("finish"))).toHaveLength(1);
  });

  it("keeps what arrived where a person has to sign in again first", async () => {
    const { port } = makePort({ finishes: [new SendError("You are signed out.", "by_hand")] });
    const { sent, pauses, kept } = start(port);
    expect(await sent).toEqual({ status: "broken", sentence: "You are signed out." });
    expect(pauses).toEqual([]);
    expect(kept.at(-1)?.arrived.size).toBe(3);
  });

  it("stops where the person stops it", async () => {
    const stop = new AbortController();
    const { port, calls } = makePort({});
    const put = port.putPart;
    port.putPart = async (...args) => {
      stop.abort();
      return put(...args);
    };
    expect(await start(port, { signal: stop.signal }).sent).toEqual({ status: "stopped" });
    expect(calls.filter((call) => call.startsWith("put"))).toHaveLength(1);
    expect(calls.some((call) => call.startsWith("finish"))).toBe(false);
  });

  it("does not send what the lab has already", async () => {
    const { port, calls } = makePort({});
    const recording = {
      id: "r0",
      fileName: "old.csv",
      studyName: "S",
      participantCode: "W01",
      conditionName: "bare",
    };
    port.open = async () => ({ status: "duplicate", recording });
    expect(await start(port).sent).toEqual({ status: "held", recording });
    expect(calls).toEqual([]);
  });
});
