import { cleanup, fireEvent, render, renderHook } from "@testing-library/react";
import { afterEach, describe, expect, it, vi } from "vitest";
import { useKeys } from "./use-keys.ts";

afterEach(cleanup);

describe("single keys", () => {
  it("do what they are for, in either case, with Shift apart", () => {
    const undo = vi.fn();
    const redo = vi.fn();
    renderHook(() => useKeys({ z: undo, "shift+z": redo }, true));
    fireEvent.keyDown(document.body, { key: "z" });
    fireEvent.keyDown(document.body, { key: "Z", shiftKey: true });
    expect([undo.mock.calls.length, redo.mock.calls.length]).toEqual([1, 1]);
  });

  it("leave the browser's own keys alone", () => {
    const save = vi.fn();
    renderHook(() => useKeys({ s: save }, true));
    fireEvent.keyDown(document.body, { key: "s", ctrlKey: true });
    fireEvent.keyDown(document.body, { key: "s", metaKey: true });
    expect(save).not.toHaveBeenCalled();
  });

  it("do nothing while something is typed", () => {
    const save = vi.fn();
    renderHook(() => useKeys({ s: save }, true));
    const { getByRole } = render(<textarea />);
    fireEvent.keyDown(getByRole("textbox"), { key: "s" });
    expect(save).not.toHaveBeenCalled();
  });

  it("can be switched off, and the list of keys can still be opened", () => {
    const save = vi.fn();
    const list = vi.fn();
    renderHook(() => useKeys({ s: save, "?": list }, false));
    fireEvent.keyDown(document.body, { key: "s" });
    fireEvent.keyDown(document.body, { key: "?", shiftKey: true });
    expect([save.mock.calls.length, list.mock.calls.length]).toEqual([0, 1]);
  });
});
