import { act, cleanup, renderHook } from "@testing-library/react";
import { afterEach, beforeEach, describe, expect, it } from "vitest";
import type { SavedWindow } from "#app/domain/fit.ts";
import { setAside, trim, undo } from "#app/domain/window.ts";
import { type EditBase, editsKey, useEdits } from "./use-edits.ts";

const KEY = editsKey("person", "recording");
const window = (onset_s: number): SavedWindow => ({
  axis: "FE",
  onset_s,
  window_ms: [0, 60],
  included: true,
  reason: null,
  origin: "found",
  edited: false,
});
const baseOf = (fitId: string | null, windows = [window(1), window(3)]): EditBase => ({
  recordingSha256: "a".repeat(64),
  baseFitId: fitId,
  axes: ["FE"],
  windows,
});
const first = { axis: "FE", onset_s: 1 };

function open(base: EditBase | null) {
  return renderHook(({ base: held }) => useEdits(KEY, held), { initialProps: { base } });
}

beforeEach(() => localStorage.clear());
afterEach(cleanup);

describe("edits of a recording's windows", () => {
  it("wait until the recording is open", () => {
    const page = open(null);
    expect(page.result.current.list).toBeNull();
    page.rerender({ base: baseOf(null) });
    expect(page.result.current.list?.windows).toHaveLength(2);
  });

  it("come back after a reload, with undo", () => {
    const base = baseOf("fit 1");
    const before = open(base);
    act(() => before.result.current.change((list) => trim(list, first, [0, 40])));
    expect(before.result.current.unsaved).toBe(1);
    before.unmount();
    const after = open(base);
    expect(after.result.current.restored).toBe(1);
    expect(after.result.current.list?.windows[0]?.window_ms).toEqual([0, 40]);
    act(() => after.result.current.change(undo));
    expect(after.result.current.unsaved).toBe(0);
    expect(localStorage.getItem(KEY)).toBeNull();
  });

  it("leave nothing behind once they are saved, and meet the new fit without a question", () => {
    const page = open(baseOf("fit 1"));
    act(() => page.result.current.change((list) => trim(list, first, [0, 40])));
    const { windows } = page.result.current.list ?? { windows: [] };
    act(() => page.result.current.saved("fit 2", windows));
    expect(page.result.current.unsaved).toBe(0);
    // The page still holds fit 1 for a moment while the person goes on.
    act(() => page.result.current.change((list) => setAside(list, first, "Slipped")));
    expect(page.result.current.theirs).toBeNull();
    page.rerender({ base: baseOf("fit 2", [...windows]) });
    expect(page.result.current.theirs).toBeNull();
    expect(page.result.current.unsaved).toBe(1);
  });

  it("count what was done while the answer was on its way", () => {
    const page = open(baseOf("fit 1"));
    act(() => page.result.current.change((list) => trim(list, first, [0, 40])));
    const sent = page.result.current.list?.windows ?? [];
    act(() => page.result.current.change((list) => trim(list, first, [0, 45])));
    act(() => page.result.current.saved("fit 2", sent));
    expect(page.result.current.unsaved).toBe(1);
  });

  it("take up another person's fit by themselves where nothing would be lost", () => {
    const page = open(baseOf("fit 1"));
    page.rerender({ base: baseOf("fit 2", [window(1)]) });
    expect(page.result.current.list?.windows).toHaveLength(1);
    expect(page.result.current.theirs).toBeNull();
  });

  it("ask where another person's fit would take their place, and lose neither", () => {
    const page = open(baseOf("fit 1"));
    act(() => page.result.current.change((list) => trim(list, first, [0, 40])));
    page.rerender({ base: baseOf("fit 2", [window(1)]) });
    expect(page.result.current.theirs?.baseFitId).toBe("fit 2");

    act(() => page.result.current.takeTheirs());
    expect(page.result.current.list?.windows).toHaveLength(1);
    expect(page.result.current.unsaved).toBe(0);

    act(() => page.result.current.bringBack());
    expect(page.result.current.list?.windows[0]?.window_ms).toEqual([0, 40]);
    expect(page.result.current.list?.baseFitId).toBe("fit 2");
    expect(page.result.current.unsaved).toBe(2);
  });

  it("go on over another person's fit where the person says so", () => {
    const page = open(baseOf("fit 1"));
    act(() => page.result.current.change((list) => trim(list, first, [0, 40])));
    page.rerender({ base: baseOf("fit 2") });
    act(() => page.result.current.keepMine());
    expect(page.result.current.theirs).toBeNull();
    expect(page.result.current.list?.baseFitId).toBe("fit 2");
    expect(page.result.current.list?.windows[0]?.window_ms).toEqual([0, 40]);
  });
});
