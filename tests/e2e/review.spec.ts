/** A second pair of eyes: a reviewer opens a submitted fit, sees its residuals, and returns it. */
import { expect, test } from "@playwright/test";
import { demoAddress, signInToDemo } from "../support/demo-page.ts";

test("a fit is approved only after its residuals were opened, and returned only with a note", async ({
  page,
}) => {
  test.setTimeout(120_000);
  await signInToDemo(page, "reviewer");
  await page.goto(`${demoAddress()}/reviews`);
  const row = page.getByRole("row").filter({ hasText: "w05_bare_a.csv" });
  await row.getByRole("link").first().click();
  await expect(page).toHaveURL(/\/fits\//);

  const giveBack = page.getByRole("button", { name: /^Return/ });
  await giveBack.click();
  await expect(page.getByText("Say what should be changed, then return it.")).toBeVisible();
  await page
    .getByLabel("Note to the biomechanist")
    .fill("Window 4 begins late: look at its onset again.");
  await giveBack.click();
  await expect(page.getByText("returned").first()).toBeVisible();

  // The next one is approved, once its residuals are on the screen.
  await page.goto(`${demoAddress()}/reviews`);
  const next = page.getByRole("row").filter({ hasText: "w05_loose_a.csv" });
  await next.getByRole("link").first().click();
  await page
    .getByRole("heading", { name: /^Residuals/ })
    .first()
    .scrollIntoViewIfNeeded();
  const approve = page.getByRole("button", { name: /^Approve/ });
  await expect(approve).toBeEnabled({ timeout: 30_000 });
  await approve.click();
  await expect(page.getByText("approved").first()).toBeVisible();
  await page.goto(`${demoAddress()}/reviews`);
  await expect(page.getByText("w05_loose_a.csv")).toHaveCount(0);
});

test("who worked on a fit is told why they cannot decide on it", async ({ page }) => {
  await signInToDemo(page, "biomechanist");
  await page.goto(`${demoAddress()}/reviews`);
  await page
    .getByRole("row")
    .filter({ hasText: "w05_tight_a.csv" })
    .getByRole("link")
    .first()
    .click();
  await expect(page).toHaveURL(/\/fits\//);
  await expect(page.getByRole("button", { name: /^Approve/ })).toHaveCount(0);
});
