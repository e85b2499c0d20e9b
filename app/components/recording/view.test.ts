import { describe, expect, it } from "vitest";
import { panned, rangeOf, showing, windowView, zoomed } from "./view.ts";

const whole = { fromS: 0, toS: 30 };

describe("the stretch that the traces show", () => {
  it("is −120 to 220 ms round a window, more where its trim or baseline needs it", () => {
    const usual = rangeOf(windowView([-50, 0], [0, 60]), 10, whole);
    expect([usual.fromS, usual.toS]).toEqual([9.88, 10.22]);
    const wide = rangeOf(windowView([-200, 0], [0, 400]), 10, whole);
    expect([wide.fromS, wide.toS]).toEqual([9.78, 10.42]);
  });

  it("goes along with the chosen window while it is near one", () => {
    const view = zoomed(windowView([-50, 0], [0, 60]), 10, whole, 2, 10);
    expect(view.kind).toBe("near");
    const next = rangeOf(view, 12, whole);
    expect(next.fromS).toBeCloseTo(11.76);
    expect(next.toS).toBeCloseTo(12.44);
  });

  it("keeps the time under the pointer where it is", () => {
    const view = windowView([-50, 0], [0, 60]);
    const { fromS, toS } = rangeOf(zoomed(view, 10, whole, 0.5, 10.1), 10, whole);
    expect((10.1 - fromS) / (toS - fromS)).toBeCloseTo((10.1 - 9.88) / 0.34);
  });

  it("ends at the whole recording, and begins again from there", () => {
    const all = zoomed(windowView([-50, 0], [0, 60]), 10, whole, 1e6, 10);
    expect(rangeOf(all, 10, whole)).toEqual(whole);
    const { fromS, toS } = rangeOf(zoomed(all, 10, whole, 1 / 3, 0), 10, whole);
    expect([fromS, toS - fromS]).toEqual([0, 10]);
  });

  it("never pans out of the recording", () => {
    const part = { kind: "fixed", fromS: 20, toS: 25 } as const;
    expect(rangeOf(panned(part, null, whole, 100), null, whole)).toEqual({ fromS: 25, toS: 30 });
  });

  it("brings the chosen window into sight where it is not", () => {
    const part = { kind: "fixed", fromS: 20, toS: 25 } as const;
    expect(showing(part, 22, whole)).toBe(part);
    expect(showing(part, 3, whole)).toEqual({ kind: "fixed", fromS: 0.5, toS: 5.5 });
  });
});
