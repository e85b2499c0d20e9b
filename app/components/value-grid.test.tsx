import { cleanup, render, screen, within } from "@testing-library/react";
import { MemoryRouter } from "react-router";
import { afterEach, beforeEach, describe, expect, it } from "vitest";
import { type GridValue, ValueGrid } from "./value-grid.tsx";

afterEach(cleanup);

function value(mean: number, change: Partial<GridValue> = {}): GridValue {
  return {
    mean,
    t: [mean - 0.23, mean + 0.23],
    windows: 5,
    state: "approved",
    isVerified: true,
    recordingIds: ["r1"],
    ...change,
  };
}

describe("a grid of values", () => {
  beforeEach(() => {
    render(
      <MemoryRouter>
        <ValueGrid
          baselineName="bare"
          caption="Stiffness"
          changes={[null, { n: 2, mean: -0.4, interval: [-0.6, -0.2] }]}
          conditions={[
            { id: "bare", name: "bare" },
            { id: "tight", name: "tight" },
          ]}
          means={[
            { n: 1, mean: 4.6, interval: null },
            { n: 2, mean: 5, interval: [4.4, 5.6] },
          ]}
          rows={[
            { participantId: "p1", code: "W01", cells: [value(4.6), value(5.2)] },
            {
              participantId: "p2",
              code: "W02",
              cells: [null, value(4.8, { state: "draft", isVerified: false })],
            },
          ]}
          scale={{ factor: 1, unit: "N·m/rad" }}
        />
      </MemoryRouter>,
    );
  });

  const cellsOf = (name: RegExp) =>
    within(screen.getByRole("row", { name }))
      .getAllByRole("cell")
      .map((cell) => cell.textContent);

  it("stands on one decimal column", () => {
    expect(cellsOf(/^W01/)).toEqual(["4.60±0.23", "5.20±0.23"]);
  });

  it("marks what is not approved and not verified, in words too", () => {
    const [missing, draft] = cellsOf(/^W02/);
    expect(missing).toContain("no value");
    expect(draft).toContain("draft");
    expect(draft).toContain("unverified");
  });

  it("gives no mean of one participant, and a change with its sign", () => {
    expect(cellsOf(/^mean/)).toEqual(["–", "5.00±0.60"]);
    expect(cellsOf(/^change/)[1]).toBe("−0.40±0.20");
  });
});
