import { expect, it } from "vitest";
import { windowSpan } from "#app/engine/windows/window-span.ts";

it("a window is closed, its baseline half-open, the span from the first start to the last end", () => {
  expect(windowSpan(1000, [0, 100], [-50, 0], 2000)).toEqual({
    onset: 1000,
    baselineStart: 900,
    baselineEnd: 1000,
    start: 1000,
    end: 1200,
    spanStart: 900,
    spanEnd: 1200,
  });
  const early = windowSpan(10, [-30, 20], [-20, 40], 1000);
  expect([early.spanStart, early.spanEnd]).toEqual([-20, 50]);
});

it("milliseconds go to the nearest sample", () => {
  const span = windowSpan(0, [1.6, 9.4], [-1.4, 0], 1000);
  expect([span.baselineStart, span.start, span.end]).toEqual([-1, 2, 9]);
});
