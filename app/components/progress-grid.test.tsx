import { cleanup, fireEvent, render, screen } from "@testing-library/react";
import { MemoryRouter } from "react-router";
import { afterEach, expect, it } from "vitest";
import { type Cell, cellKey } from "#app/domain/cell.ts";
import { ProgressGrid } from "./progress-grid.tsx";

afterEach(cleanup);

const AXES = [
  { name: "FE", label: "flexion–extension" },
  { name: "RUD", label: "radial–ulnar deviation" },
];
const CONDITIONS = ["bare", "tight"].map((name) => ({
  id: name,
  name,
  isBaseline: name === "bare",
  isActive: false,
}));
const PARTICIPANTS = [
  { id: "p1", code: "W01" },
  { id: "p2", code: "W02" },
];

function show(cells: [string, Cell][]) {
  render(
    <MemoryRouter>
      <ProgressGrid
        axes={AXES}
        cells={new Map(cells)}
        conditions={CONDITIONS}
        listHref={(participant, condition) => `/list/${participant}/${condition}`}
        participants={PARTICIPANTS}
      />
    </MemoryRouter>,
  );
}

it("leads from a cell with one recording to it, and with several to their list", () => {
  show([
    [cellKey("p1", "bare", "FE"), { state: "approved", recordingIds: ["r1"] }],
    [cellKey("p1", "tight", "FE"), { state: "draft", recordingIds: ["r2", "r3"] }],
  ]);
  const one = screen.getByRole("link", { name: "W01, bare, flexion–extension: approved" });
  expect(one.getAttribute("href")).toBe("/recordings/r1");
  const several = screen.getByRole("link", {
    name: "W01, tight, flexion–extension: draft, 2 recordings, the least advanced of them",
  });
  expect(several.getAttribute("href")).toBe("/list/p1/tight");
});

it("says in words that a cell holds nothing", () => {
  show([]);
  expect(
    screen.getByRole("gridcell", { name: "W02, tight, radial–ulnar deviation: nothing" }),
  ).toBeTruthy();
});

it("is one stop for Tab; arrow keys walk over both axes and stop at the edges", () => {
  show([[cellKey("p1", "tight", "FE"), { state: "approved", recordingIds: ["r1"] }]]);
  const stops = () =>
    [...document.querySelectorAll<HTMLElement>("[data-cell]")].filter(
      (cell) => cell.tabIndex === 0,
    );
  expect(stops()).toHaveLength(1);
  const [first] = stops();
  first?.focus();
  const press = (key: string) => fireEvent.keyDown(document.activeElement as Element, { key });
  press("ArrowRight");
  expect(document.activeElement?.getAttribute("href")).toBe("/recordings/r1");
  press("ArrowRight");
  expect(document.activeElement?.textContent).toContain("radial–ulnar deviation");
  press("ArrowDown");
  press("ArrowDown");
  expect(document.activeElement?.getAttribute("data-cell")).toBe("1,2");
  press("End");
  expect(document.activeElement?.getAttribute("data-cell")).toBe("1,3");
  expect(stops()).toHaveLength(1);
});
