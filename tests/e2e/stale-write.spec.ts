/** Two people change the same row: the second sees both states, and nothing that was typed is lost. */
import { expect, test } from "@playwright/test";
import { demoAddress, signInToDemo } from "../support/demo-page.ts";

test("a change that comes second is shown beside the first, and can be saved in its place", async ({
  page,
}) => {
  await signInToDemo(page, "manager");
  await page.goto(`${demoAddress()}/studies`);
  const study = page.getByRole("link", { name: "Wrist wraps and stiffness" }).first();
  const setUp = `${demoAddress()}${await study.getAttribute("href")}/set-up`;
  const other = await page.context().newPage();
  for (const tab of [page, other]) {
    await tab.goto(setUp);
    await tab.getByRole("link", { name: "Change W06" }).click();
    await expect(tab.getByRole("form", { name: "Change W06" })).toBeVisible();
  }
  const mass = "Body mass";
  const first = other.getByRole("form", { name: "Change W06" });
  await first.getByLabel(mass).fill("83.5");
  await first.getByRole("button", { name: "Save" }).click();
  await expect(first).toHaveCount(0);

  const second = page.getByRole("form", { name: "Change W06" });
  await second.getByLabel(mass).fill("81");
  await second.getByRole("button", { name: "Save" }).click();
  await expect(page.getByText("W06 was changed meanwhile.")).toBeVisible();
  await expect(second).toContainText("Stands now: W06, right, 83.5 kg, 1.86 m");
  await expect(second.getByLabel(mass)).toHaveValue("81");
  await second.getByRole("button", { name: "Save" }).click();
  await expect(second).toHaveCount(0);
  await expect(page.getByText("81.0")).toBeVisible();
});
