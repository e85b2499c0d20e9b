/**
 * Every screen in both themes: no fault that axe finds (axe-core, rules of WCAG 2.2 A and AA), and
 * nothing to scroll sideways for at 390 and 1280 pixels.
 */
import { readFileSync } from "node:fs";
import { createRequire } from "node:module";
import { expect, type Page, test } from "@playwright/test";
import type { AxeResults } from "axe-core";
import type { Role } from "#app/domain/role.ts";
import { demoAddress, signInToDemo } from "../support/demo-page.ts";

const axeSource = readFileSync(
  createRequire(import.meta.url).resolve("axe-core/axe.min.js"),
  "utf8",
);

interface Screen {
  name: string;
  /** From the address of the study, or of the first recording or fit. */
  path(page: Page): Promise<string>;
}

async function studyPath(page: Page): Promise<string> {
  await page.goto(`${demoAddress()}/studies`);
  const link = page.getByRole("link", { name: "Wrist wraps and stiffness" }).first();
  return (await link.getAttribute("href")) as string;
}

async function firstLink(page: Page, path: string, begins: string): Promise<string> {
  await page.goto(demoAddress() + path);
  return (await page.locator(`main a[href^="${begins}"]`).first().getAttribute("href")) as string;
}

const at = (path: string) => async () => path;
const inStudy = (place: string) => async (page: Page) => (await studyPath(page)) + place;

const SCREENS: Record<Role, Screen[]> = {
  biomechanist: [
    { name: "for you", path: at("/") },
    { name: "recordings", path: inStudy("/recordings") },
    { name: "take in", path: inStudy("/take-in") },
    { name: "protocols", path: inStudy("/protocols") },
    {
      name: "recording",
      path: async (page) => firstLink(page, `${await studyPath(page)}/recordings`, "/recordings/"),
    },
  ],
  analyst: [
    { name: "study", path: inStudy("") },
    { name: "refused", path: inStudy("/take-in") },
    { name: "missing", path: at("/recordings/none") },
  ],
  reviewer: [
    { name: "reviews", path: at("/reviews") },
    { name: "fit", path: (page) => firstLink(page, "/reviews", "/fits/") },
  ],
  manager: [
    { name: "studies", path: at("/studies") },
    { name: "new study", path: at("/studies/new") },
    { name: "set-up", path: inStudy("/set-up") },
  ],
};

async function expectWellMade(page: Page, name: string): Promise<void> {
  await page.waitForLoadState("networkidle");
  for (const theme of ["light", "dark"] as const) {
    await page.emulateMedia({ colorScheme: theme, reducedMotion: "reduce" });
    for (const width of [1280, 390]) {
      await page.setViewportSize({ width, height: 860 });
      const wide = await page.evaluate(
        () => document.documentElement.scrollWidth - document.documentElement.clientWidth,
      );
      expect(wide, `${name} scrolls sideways at ${width}`).toBeLessThanOrEqual(0);
    }
    await page.setViewportSize({ width: 1280, height: 860 });
    await page.evaluate(axeSource);
    const results = await page.evaluate(async () => {
      const { axe } = window as unknown as { axe: { run(options: object): Promise<AxeResults> } };
      return axe.run({
        runOnly: ["wcag2a", "wcag2aa", "wcag21a", "wcag21aa", "wcag22aa", "best-practice"],
      });
    });
    const faults = results.violations.map(
      (fault) => `${fault.id}: ${fault.nodes.map((node) => node.html.slice(0, 160)).join(" | ")}`,
    );
    expect(faults, `${name}, ${theme}`).toEqual([]);
  }
}

test("the sign-in page is well made", async ({ page }) => {
  await page.goto(`${demoAddress()}/sign-in`);
  await expectWellMade(page, "sign-in");
});

for (const [role, screens] of Object.entries(SCREENS) as [Role, Screen[]][]) {
  test(`the screens of the ${role} are well made: ${screens.map(({ name }) => name).join(", ")}`, async ({
    page,
  }) => {
    test.setTimeout(300_000);
    await signInToDemo(page, role);
    for (const screen of screens) {
      await page.goto(demoAddress() + (await screen.path(page)));
      if (screen.name === "recording") {
        await expect(page.getByRole("region", { name: "Residuals of all windows" })).toBeVisible({
          timeout: 30_000,
        });
      }
      await expectWellMade(page, screen.name);
    }
  });
}
