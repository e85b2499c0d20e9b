import { cleanup, render } from "@testing-library/react";
import { afterEach, expect, it } from "vitest";
import { FigureNumber } from "./figure-number.tsx";
import { TermRow } from "./term-row.tsx";

afterEach(cleanup);

it("shows what the interval supports and keeps every digit in the title", () => {
  const { container } = render(
    <FigureNumber
      interval={[4.4012345, 4.8752345]}
      showInterval
      unit="N·m/rad"
      value={4.6382345}
    />,
  );
  expect(container.textContent).toBe("4.64 ± 0.24 N·m/rad");
  expect(container.firstElementChild?.getAttribute("title")).toBe(
    "4.6382345 N·m/rad, from 4.4012345 to 4.8752345",
  );
});

it("says that a value is not determined, never 0", () => {
  const { container } = render(<FigureNumber unit="m" value={null} />);
  expect(container.textContent).toContain("–");
  expect(container.textContent).toContain("not determined");
  expect(container.textContent).not.toContain("0");
});

it("puts one window's value and the mean of all on one decimal column", () => {
  const { container } = render(
    <table>
      <tbody>
        <TermRow
          pooled={{ value: 0.00314, interval: [0.00311, 0.00317] }}
          term="I"
          value={0.0031}
        />
      </tbody>
    </table>,
  );
  const cells = [...container.querySelectorAll("td")].map((cell) => cell.textContent);
  expect(cells).toEqual(["3.100", "3.140 ± 0.030"]);
  expect(container.querySelector("th")?.textContent).toBe("I inertia 10⁻³ kg·m²");
});
