import { act, renderHook, waitFor } from "@testing-library/react";
import { describe, expect, it, vi } from "vitest";
import { defaultChoices } from "#app/domain/protocol.ts";
import type { FileHead, FileReading } from "#app/engine/types.ts";
import { confirmAxis, standingOfAll, type TakeInStudy } from "./batch.ts";
import type { FinishAnswer, SendPort } from "./send-file.ts";
import { type ReadPort, type TakeInPorts, useTakeIn } from "./use-take-in.ts";

const study: TakeInStudy = {
  rigMap: null,
  axes: [{ name: "FE", label: "flexion–extension", positive: "extension", negative: "flexion" }],
  conditions: [{ id: "c1", name: "bare" }],
  postures: [{ id: "s1", name: "seated" }],
  participants: [{ id: "p1", code: "W01", testedSide: "right" }],
  choices: defaultChoices,
  fileNamePattern: null,
  lastDay: "2100-01-01",
};

const HEAD: FileHead = {
  status: "read",
  preview: {
    dialect: { encoding: "utf-8", separator: ",", decimal: ".", headerLine: 1, unitsLine: null },
    header: ["t", "ang", "trq"],
    units: ["ms", "deg", "N.m"],
    rows: [],
    preamble: [],
    flags: [],
  },
  proposed: {
    time: { column: "t", unit: "ms", certain: true },
    axes: [
      {
        name: "FE",
        angle: { column: "ang", unit: "deg", certain: true },
        torque: { column: "trq", unit: "N.m", certain: true },
        limbAngle: null,
      },
    ],
    trigger: null,
    emg: [],
  },
};

const READING: FileReading = {
  status: "read",
  facts: {
    samples: 100,
    rateHz: 1000,
    durationS: 0.1,
    gaps: 0,
    duplicates: 0,
    missing: 0,
    flags: [],
  },
  movements: [{ axis: "FE", status: "moved", onsetS: 0.05, amplitudeDeg: 4, torqueSign: 1 }],
};

/** A worker that answers at once, and a storage whose parts arrive when the test lets them. */
function makePorts() {
  let reading = 0;
  const most = { reading: 0, sending: 0 };
  const gates: (() => void)[] = [];
  const finished: unknown[] = [];
  const cancelled: string[] = [];
  const once = async <Answer,>(answer: Answer): Promise<Answer> => {
    reading += 1;
    most.reading = Math.max(most.reading, reading);
    await Promise.resolve();
    reading -= 1;
    return answer;
  };
  const read: ReadPort = {
    hash: async (file) => once(`hash of ${(file as File).name}`),
    lookAtHead: () => once(HEAD),
    readWhole: (file) =>
      once<FileReading>(
        (file as File).name.includes("bad")
          ? { status: "refused", sentence: "The row has 2 cells.", line: 7 }
          : READING,
      ),
  };
  let sending = 0;
  let opened = 0;
  const send: SendPort = {
    open: async () => {
      opened += 1;
      return {
        status: "open",
        uploadId: `u${opened}`,
        partSizeBytes: 1000,
        parts: [{ number: 1, url: "x" }],
      };
    },
    renew: async () => ({ status: "open", parts: [{ number: 1, url: "y" }] }),
    putPart: (_url, _bytes, _onSent, signal) =>
      new Promise((resolve, reject) => {
        sending += 1;
        most.sending = Math.max(most.sending, sending);
        const end = () => {
          sending -= 1;
        };
        signal.addEventListener("abort", () => {
          end();
          reject(new Error("stopped"));
        });
        gates.push(() => {
          end();
          resolve("etag");
        });
      }),
    finish: async (uploadId, input): Promise<FinishAnswer> => {
      finished.push(input);
      return { status: "ready", recordingId: `recording of ${uploadId}` };
    },
    look: async () => ({ status: "open" }),
    cancel: async (uploadId) => {
      cancelled.push(uploadId);
    },
  };
  const ports: TakeInPorts = {
    read,
    send,
    findHeld: async (sha256s) =>
      sha256s
        .filter((sha256) => sha256.includes("old"))
        .map((sha256) => ({
          sha256,
          recording: {
            id: "r0",
            fileName: "w01_old.csv",
            studyName: "S",
            participantCode: "W01",
            conditionName: "bare",
          },
        })),
  };
  return { ports, most, gates, finished, cancelled };
}

function files(...names: string[]): File[] {
  return names.map((name) => new File(["t,ang,trq\n"], name));
}

async function start(names: string[]) {
  const made = makePorts();
  const onDone = vi.fn();
  const { result } = renderHook(() => useTakeIn(study, made.ports, onDone));
  act(() => result.current.add(files(...names)));
  const all = () => standingOfAll(result.current.batch, study);
  await waitFor(() => expect(all().reading).toBe(0));
  return { ...made, onDone, result, all };
}

describe("taking files in", () => {
  it("reads one file at a time, sends two at most, and ends with what the server verified", async () => {
    const made = await start(["w01_a.csv", "w01_b.csv", "w01_c.csv", "w01_bad.csv", "w01_old.csv"]);
    const { result, all } = made;
    expect(made.most.reading).toBe(1);
    // The bad one is refused, and what the lab holds already is known as soon as the server says so.
    await waitFor(() => expect(all().needYou).toHaveLength(3));
    const [first] = all().needYou;
    act(() => result.current.change((now) => confirmAxis(now, study, first ?? "", "FE")));
    expect(all().good).toHaveLength(3);

    act(() => result.current.take(all().good));
    for (let sent = 1; sent <= 3; sent += 1) {
      await waitFor(() => expect(made.gates.length).toBeGreaterThan(0));
      await act(async () => made.gates.shift()?.());
      await waitFor(() => expect(all().ready).toBe(sent));
    }
    expect(made.most.sending).toBe(2);
    expect(made.onDone).toHaveBeenCalled();
    expect(made.finished[0]).toMatchObject({
      participantId: "p1",
      conditionId: "c1",
      postureId: "s1",
      parts: [{ number: 1, etag: "etag" }],
      map: { time: { column: "t", unit: "ms" }, axes: [{ name: "FE" }] },
    });
    expect(made.finished[0]).not.toHaveProperty("fileNamePattern");
  });

  it("gives an upload up where a person stops it, and the file can be taken in again", async () => {
    const { result, all, gates, cancelled } = await start(["w01_a.csv"]);
    act(() => result.current.change((now) => confirmAxis(now, study, "file-1", "FE")));
    act(() => result.current.take(["file-1"]));
    await waitFor(() => expect(gates).toHaveLength(1));
    act(() => result.current.stop(["file-1"]));
    expect(cancelled).toEqual(["u1"]);
    expect(all().good).toEqual(["file-1"]);

    act(() => result.current.take(["file-1"]));
    await waitFor(() => expect(gates).toHaveLength(2));
    await act(async () => gates[1]?.());
    await waitFor(() => expect(all().ready).toBe(1));
  });

  it("does not send what still needs a person", async () => {
    const { result, all, gates } = await start(["w01_a.csv"]);
    act(() => result.current.take(["file-1"]));
    expect(all().underWay).toEqual([]);
    expect(gates).toHaveLength(0);
  });
});
