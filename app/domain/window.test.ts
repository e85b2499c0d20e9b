import fc from "fast-check";
import { describe, expect, it } from "vitest";
import {
  addByHand,
  applyTrimToAll,
  countUnsaved,
  editToRedo,
  editToUndo,
  foundWindows,
  markSaved,
  parseWindows,
  redo,
  restoreEdits,
  serializeEdits,
  setAside,
  startEdits,
  takeBack,
  trim,
  undo,
  type WindowEdits,
  WindowsError,
  windowsDocument,
} from "./window.ts";

const SHA = "a".repeat(64);

const entry = {
  recording_sha256: SHA,
  axis: "FE",
  onset_s: 1.25,
  window_ms: [0, 80],
  included: true,
  reason: null,
};

function problem(value: unknown): WindowsError {
  try {
    parseWindows(typeof value === "string" ? value : JSON.stringify(value));
  } catch (error) {
    if (error instanceof WindowsError) return error;
    throw error;
  }
  throw new Error("accepted");
}

describe("a WINDOWS document", () => {
  it("reads as it is written, and is written with sorted keys and no white space", () => {
    const windows = [
      {
        axis: "FE",
        onset_s: 1.25,
        window_ms: [0, 80] as [number, number],
        included: true,
        reason: null,
      },
      {
        axis: "FE",
        onset_s: 2.5,
        window_ms: [-5, 60] as [number, number],
        included: false,
        reason: "Cough.",
      },
    ];
    const text = windowsDocument(SHA, windows);
    expect(text).toBe(
      `{"version":1,"windows":[{"axis":"FE","included":true,"onset_s":1.25,"reason":null,"recording_sha256":"${SHA}","window_ms":[0,80]},{"axis":"FE","included":false,"onset_s":2.5,"reason":"Cough.","recording_sha256":"${SHA}","window_ms":[-5,60]}]}`,
    );
    expect(parseWindows(text).windows).toEqual(
      windows.map((window) => ({ recording_sha256: SHA, ...window })),
    );
  });

  it.each([
    [{ version: 2, windows: [] }, /^Version 2 is not known; use 1\.$/],
    [{ windows: [] }, /^version: .*missing/],
    [{ version: 1 }, /^windows: .*missing/],
    [{ version: 1, windows: [], note: "" }, /^note: "note" is not a key/],
    [{ version: 1, windows: [{ ...entry, K: 3 }] }, /^windows\.0\.K: /],
    [{ version: 1, windows: [{ ...entry, recording_sha256: "abc" }] }, /64 hexadecimal/],
    [
      { version: 1, windows: [{ ...entry, onset_s: "1" }] },
      /^windows\.0\.onset_s: "1" is not a number/,
    ],
    [{ version: 1, windows: [{ ...entry, included: 1 }] }, /true or false/],
    [{ version: 1, windows: [{ ...entry, window_ms: [80, 0] }] }, /after the start/],
    [{ version: 1, windows: [{ ...entry, window_ms: [0, 10_001] }] }, /most is 10000/],
    [{ version: 1, windows: [{ ...entry, axis: undefined }] }, /^windows\.0\.axis: .*missing/],
    [{ version: 1, windows: [entry, entry] }, /^windows\.1: .*twice/],
    [[], /object/],
  ])("%j is refused", (document, words) => {
    expect(problem(document).message).toMatch(words);
  });

  it("with a key that hides in objects, or twice, is refused", () => {
    expect(problem('{"version":1,"windows":[],"__proto__":{}}').message).toContain("__proto__");
    expect(problem('{\n"version":1,\n"version":1,"windows":[]}').line).toBe(3);
  });

  it("knows a SHA-256 in capitals", () => {
    const document = { version: 1, windows: [{ ...entry, recording_sha256: "A".repeat(64) }] };
    expect(parseWindows(JSON.stringify(document)).windows[0]?.recording_sha256).toBe(SHA);
  });
});

function list(): WindowEdits {
  return startEdits({
    recordingSha256: SHA,
    baseFitId: null,
    axes: ["FE", "RUD"],
    windows: foundWindows([
      { axis: "RUD", onset_s: 0.5, window_ms: [0, 100], included: true, reason: null },
      { axis: "FE", onset_s: 2, window_ms: [0, 100], included: true, reason: null },
      { axis: "FE", onset_s: 1, window_ms: [0, 100], included: false, reason: "gap" },
    ]),
  });
}

const first = { axis: "FE", onset_s: 1 };
const second = { axis: "FE", onset_s: 2 };

describe("the edits of a recording's windows", () => {
  it("stand by axis in the protocol's order, then by onset", () => {
    const edits = addByHand(list(), { axis: "FE", onset_s: 1.5, window_ms: [0, 60] });
    expect(edits.windows.map((window) => [window.axis, window.onset_s])).toEqual([
      ["FE", 1],
      ["FE", 1.5],
      ["FE", 2],
      ["RUD", 0.5],
    ]);
  });

  it("say in words what each did", () => {
    let edits = trim(list(), second, [-5, 62.5]);
    edits = setAside(edits, second, " The participant coughed. ");
    edits = takeBack(edits, first);
    edits = addByHand(edits, { axis: "RUD", onset_s: 3.25718, window_ms: [0, 50] });
    edits = applyTrimToAll(edits, "FE", [0, 80]);
    expect(edits.edits.map((edit) => edit.words)).toEqual([
      "Trimmed FE at 2 s to −5 to 62.5 ms",
      "Set aside FE at 2 s: The participant coughed.",
      "Took back FE at 1 s",
      "Added RUD at 3.257 s by hand",
      "Trimmed 2 windows of FE to 0 to 80 ms",
    ]);
    expect(edits.windows).toEqual([
      { ...first, window_ms: [0, 80], included: true, reason: null, origin: "found", edited: true },
      {
        ...second,
        window_ms: [0, 80],
        included: false,
        reason: "The participant coughed.",
        origin: "found",
        edited: true,
      },
      {
        axis: "RUD",
        onset_s: 0.5,
        window_ms: [0, 100],
        included: true,
        reason: null,
        origin: "found",
        edited: false,
      },
      {
        axis: "RUD",
        onset_s: 3.25718,
        window_ms: [0, 50],
        included: true,
        reason: null,
        origin: "by_hand",
        edited: true,
      },
    ]);
  });

  it("that change nothing are no edits", () => {
    const edits = list();
    expect(trim(edits, second, [0, 100])).toBe(edits);
    expect(takeBack(edits, second)).toBe(edits);
    expect(applyTrimToAll(edits, "FE", [0, 100])).toBe(edits);
    expect(setAside(edits, first, "gap")).toBe(edits);
    expect(addByHand(edits, { ...second, window_ms: [0, 50] })).toBe(edits);
    expect(undo(edits)).toBe(edits);
    expect(redo(edits)).toBe(edits);
  });

  it("refuse a missing window, an empty reason and a window that ends before it begins", () => {
    expect(() => trim(list(), { axis: "FE", onset_s: 9 }, [0, 50])).toThrow(RangeError);
    expect(() => setAside(list(), second, "  ")).toThrow(RangeError);
    expect(() => trim(list(), second, [50, 50])).toThrow(RangeError);
    expect(() => trim(list(), second, [0, Number.NaN])).toThrow(RangeError);
  });

  it("name the step that undo and redo would take, and a new edit drops what was undone", () => {
    let edits = setAside(trim(list(), second, [0, 60]), second, "slip");
    edits = undo(edits);
    expect(editToUndo(edits)?.kind).toBe("trim");
    expect(editToRedo(edits)?.kind).toBe("set_aside");
    edits = takeBack(edits, first);
    expect(editToRedo(edits)).toBeNull();
    expect(edits.edits.map((edit) => edit.kind)).toEqual(["trim", "take_back"]);
  });

  it("count what is not saved by window, and 0 again once it is undone or saved", () => {
    let edits = trim(trim(list(), second, [0, 60]), second, [0, 70]);
    edits = addByHand(edits, { axis: "RUD", onset_s: 4, window_ms: [0, 50] });
    expect(countUnsaved(edits)).toBe(2);
    const saved = markSaved(edits, "fit-1");
    expect(countUnsaved(saved)).toBe(0);
    expect(countUnsaved(undo(saved))).toBe(1);
    expect(countUnsaved(undo(undo(undo(edits))))).toBe(0);
  });

  const step = fc.oneof(
    fc.record({
      kind: fc.constant("trim"),
      at: fc.constantFrom(1, 2),
      end: fc.integer({ min: 1, max: 200 }),
    }),
    fc.record({
      kind: fc.constantFrom("aside", "back"),
      at: fc.constantFrom(1, 2),
      end: fc.integer({ min: 1, max: 3 }),
    }),
    fc.record({
      kind: fc.constantFrom("all", "add", "undo", "redo"),
      at: fc.constantFrom(3, 4),
      end: fc.integer({ min: 1, max: 200 }),
    }),
  );

  function taken(edits: WindowEdits, { kind, at, end }: { kind: string; at: number; end: number }) {
    const key = { axis: "FE", onset_s: at };
    if (kind === "trim") return trim(edits, key, [0, end]);
    if (kind === "aside") return setAside(edits, key, `reason ${end}`);
    if (kind === "back") return takeBack(edits, key);
    if (kind === "all") return applyTrimToAll(edits, "FE", [0, end]);
    if (kind === "add") return addByHand(edits, { ...key, window_ms: [0, end] });
    return kind === "undo" ? undo(edits) : redo(edits);
  }

  it("can all be undone to the start and redone to the end, and survive a reload at any point", () => {
    fc.assert(
      fc.property(fc.array(step, { maxLength: 30 }), (steps) => {
        const edits = steps.reduce(taken, list());

        const restored = restoreEdits(serializeEdits(edits), edits);
        expect(restored).toEqual({ status: "restored", edits });

        let back = edits;
        while (editToUndo(back) !== null) back = undo(back);
        expect(back.windows).toEqual(list().windows);
        for (let n = 0; n < edits.done; n += 1) back = redo(back);
        expect(back).toEqual(edits);
      }),
    );
  });
});

describe("edits kept over a reload", () => {
  const edits = trim(list(), second, [0, 60]);

  it("are told apart where another fit has become current meanwhile", () => {
    const restored = restoreEdits(serializeEdits(edits), { ...edits, baseFitId: "fit-2" });
    expect(restored).toEqual({ status: "other_base", edits });
  });

  it.each([
    ["another recording", serializeEdits(edits), { ...edits, recordingSha256: "b".repeat(64) }],
    ["an axis that is gone", serializeEdits(edits), { ...edits, axes: ["RUD"] }],
    ["another version", serializeEdits(edits).replace('"version":1', '"version":2'), edits],
    ["a text cut short", serializeEdits(edits).slice(0, -5), edits],
    ["more steps than there are", serializeEdits(edits).replace('"done":1', '"done":9'), edits],
  ])("are not used with %s", (_what, text, now) => {
    expect(restoreEdits(text, now)).toEqual({ status: "unusable" });
  });
});
