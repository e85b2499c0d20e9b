import { expect, it } from "vitest";
import { readTheme, themeCookie } from "./theme.ts";

it("reads the chosen theme among other cookies", () => {
  expect(readTheme("a=1; theme=night; b=2")).toBe("night");
  expect(readTheme("theme=day")).toBe("day");
});

it("follows the system where nothing, or nothing known, is chosen", () => {
  expect(readTheme(null)).toBe("system");
  expect(readTheme("my-theme=night")).toBe("system");
  expect(readTheme("theme=sepia")).toBe("system");
});

it("keeps a choice for a year and drops it for the system's setting", () => {
  expect(themeCookie("night")).toContain("Max-Age=31536000");
  expect(themeCookie("system")).toContain("Max-Age=0");
});
