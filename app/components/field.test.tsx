import { cleanup, render, screen } from "@testing-library/react";
import { afterEach, describe, expect, it } from "vitest";
import { CheckField, SelectField, TextAreaField, TextField } from "./field.tsx";

afterEach(cleanup);

describe("a field", () => {
  it("is read out with its hint and with what is wrong", () => {
    render(<TextField error={["Give a number."]} hint="In kg." label="Body mass" name="mass" />);
    const input = screen.getByLabelText("Body mass");
    const described = (input.getAttribute("aria-describedby") ?? "")
      .split(" ")
      .map((id) => document.getElementById(id)?.textContent);
    expect(described).toEqual(["In kg.", "Give a number."]);
    expect(input.getAttribute("aria-invalid")).toBe("true");
  });

  it("is neither described nor invalid where nothing is said about it", () => {
    render(<TextField error={null} label="Body mass" name="mass" />);
    const input = screen.getByLabelText("Body mass");
    expect(input.hasAttribute("aria-describedby")).toBe(false);
    expect(input.hasAttribute("aria-invalid")).toBe(false);
  });

  it("keeps a label for those who hear it where the column's head says it already", () => {
    render(<TextField label="Level" labelHidden name="level" />);
    expect(screen.getByLabelText("Level")).toBeTruthy();
  });

  it("has its own id beside another of the same name", () => {
    render(
      <>
        <TextAreaField label="One" name="note" />
        <CheckField label="Two" name="note" />
        <SelectField label="Three" name="note" options={[]} placeholder="choose" />
      </>,
    );
    const ids = ["One", "Two", "Three"].map((label) => screen.getByLabelText(label).id);
    expect(new Set(ids).size).toBe(3);
  });
});
