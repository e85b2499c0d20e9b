import { cleanup, fireEvent, render, screen } from "@testing-library/react";
import { afterEach, describe, expect, it, vi } from "vitest";
import { byLargestRms, ResidualList } from "./residual-list.tsx";

afterEach(cleanup);
vi.stubGlobal(
  "ResizeObserver",
  class {
    observe() {}
    disconnect() {}
  },
);

const windows = [0.2, 0.5, 0.5, 0.1].map((rmsNm, i) => ({
  number: i + 1,
  rmsNm,
  timeS: Float64Array.from([0, 1]),
  residualNm: Float64Array.from([rmsNm, -rmsNm]),
  words: "towards extension",
}));

describe("small views of residuals", () => {
  it("stand by RMS, the largest first, and by number where it is the same", () => {
    expect(byLargestRms(windows).map((window) => window.number)).toEqual([2, 3, 1, 4]);
  });

  it("share one scale: half the RMS is half as high", () => {
    const { container } = render(
      <ResidualList chosen={null} onChoose={() => {}} windows={windows} />,
    );
    const heights = [...container.querySelectorAll("svg")].map((svg) => {
      const [, second] = svg.querySelectorAll("path");
      return 20 - Number(second?.getAttribute("d")?.match(/^M0\.0 ([\d.]+)/)?.[1]);
    });
    expect(heights[2]).toBeCloseTo((heights[0] as number) * 0.4, 1);
  });

  it("choose their window", () => {
    const chosen: number[] = [];
    render(
      <ResidualList chosen={4} onChoose={(number) => chosen.push(number)} windows={windows} />,
    );
    fireEvent.click(screen.getByRole("button", { name: /^Window\s*1\s*, towards extension/ }));
    expect(chosen).toEqual([1]);
    expect(screen.getByRole("button", { pressed: true }).textContent).toContain("4");
  });
});
