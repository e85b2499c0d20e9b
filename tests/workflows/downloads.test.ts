import { afterAll, beforeAll, describe, expect, it, vi } from "vitest";
import type { Gate } from "#app/auth/gate.server.ts";
import { listEvents } from "#app/db/events.server.ts";
import { recordings } from "#app/db/schema.ts";
import { parseProtocol } from "#app/domain/protocol.ts";
import { parseWindows } from "#app/domain/window.ts";
import { analyze, readRecording } from "#app/engine/pipeline.ts";
import { loader as document } from "#app/routes/fits/document.ts";
import { loader as raw } from "#app/routes/recordings/raw.ts";
import { background } from "#app/workflows/background.server.ts";
import { storeFit } from "#app/workflows/store-fit.server.ts";
import { openTestLab, type TestLab } from "../support/lab.ts";
import { fitOf, readyRecording, recordingBytes, setUpStudy, sha256Of } from "../support/study.ts";
import { openTestGate, signInAs, visit } from "../support/visit.ts";

vi.setConfig({ testTimeout: 60_000, hookTimeout: 60_000 });

const bytes = recordingBytes();
let lab: TestLab;
let gate: Gate;
let cookie: string;
let recordingId: string;
let fitId: string;

beforeAll(async () => {
  lab = await openTestLab();
  gate = await openTestGate(lab);
  cookie = await signInAs(gate, lab.people.analyst.id, lab.lab.id);
  recordingId = await readyRecording(lab, await setUpStudy(lab), { fileName: "W01 größer.csv" });
  const input = await fitOf(lab, recordingId, (windows) =>
    windows.map((window, index) =>
      index === 2
        ? { ...window, included: false, reason: "The limb slipped", edited: true }
        : { ...window, window_ms: [0, 90 + index], edited: true },
    ),
  );
  const stored = await storeFit(lab.desk, lab.actor("biomechanist"), input);
  if (stored.status !== "saved") throw new Error(stored.status);
  fitId = stored.fitId;
  await background.settled();
});
afterAll(async () => {
  await background.close();
  lab.close();
});

const eventsOf = (kind: string) => listEvents(lab.store.db, lab.lab.id, { kind });

describe("the raw bytes of a recording", () => {
  const ask = (query = "", headers: Record<string, string> = {}) =>
    raw(
      visit(
        lab,
        gate,
        `/recordings/${recordingId}/raw${query}`,
        { id: recordingId },
        {
          cookie,
          headers,
        },
      ),
    );

  it("come as they were taken in, and may be kept by the browser alone", async () => {
    const answer = await ask();
    expect(sha256Of(new Uint8Array(await answer.arrayBuffer()))).toBe(sha256Of(bytes));
    expect(answer.headers.get("ETag")).toBe(`"${sha256Of(bytes)}"`);
    expect(answer.headers.get("Cache-Control")).toBe("private, no-cache");
    expect(answer.headers.get("Content-Length")).toBe(String(bytes.length));
    expect(answer.headers.get("Content-Disposition")).toBeNull();
    expect(await eventsOf("recording.downloaded")).toHaveLength(0);
  });

  it("are not sent again to who has them", async () => {
    const answer = await ask("", { "If-None-Match": `"${sha256Of(bytes)}"` });
    expect(answer.status).toBe(304);
    expect(await answer.text()).toBe("");
  });

  it("are saved under their name when asked for, and that is written down", async () => {
    const answer = await ask("?download=1");
    expect(answer.headers.get("Content-Disposition")).toContain("W01%20gr%C3%B6%C3%9Fer.csv");
    const [event] = await eventsOf("recording.downloaded");
    expect(event).toMatchObject({ personId: lab.people.analyst.id, objectId: recordingId });
  });

  it("are held back until the stored copy is verified", async () => {
    const state = (to: "verifying" | "ready") =>
      lab.store.write(async (tx) => void (await tx.update(recordings).set({ state: to })));
    await state("verifying");
    await expect(ask()).rejects.toMatchObject({ status: 409 });
    await state("ready");
  });
});

describe("a fit's documents", () => {
  const ask = (name: string) =>
    document(visit(lab, gate, `/fits/${fitId}/${name}`, { id: fitId, document: name }, { cookie }));

  it("make the same result again from the raw file", async () => {
    const [protocol, windows, result] = await Promise.all(
      ["protocol.json", "windows.json", "result.json"].map(async (name) =>
        (await ask(name)).text(),
      ),
    );
    const asked = parseProtocol(protocol ?? "");
    const again = analyze({
      protocol: asked,
      protocolSha256: sha256Of(new TextEncoder().encode(protocol)),
      recordings: [
        {
          file: "W01 größer.csv",
          sha256: sha256Of(bytes),
          signals: readRecording(bytes, asked),
        },
      ],
      rig: [],
      windows: parseWindows(windows ?? ""),
    });
    expect(JSON.parse(result ?? "")).toEqual(JSON.parse(JSON.stringify(again)));
    expect(again.windows.map((window) => window.included)).toEqual([
      true,
      true,
      false,
      true,
      true,
      true,
    ]);
  });

  it("are saved under the recording's name, and each is written down", async () => {
    const before = (await eventsOf("fit.downloaded")).length;
    const answer = await ask("windows.json");
    expect(answer.headers.get("Content-Disposition")).toContain(
      "W01%20gr%C3%B6%C3%9Fer-fit-1-windows.json",
    );
    const events = await eventsOf("fit.downloaded");
    expect(events).toHaveLength(before + 1);
    expect(JSON.parse(events[0]?.detail ?? "")).toMatchObject({ document: "windows.json" });
  });

  it("have no other name", async () => {
    await expect(ask("windows.csv")).rejects.toMatchObject({ status: 404 });
  });
});
