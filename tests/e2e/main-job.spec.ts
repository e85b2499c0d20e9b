/**
 * The main job as a biomechanist does it: two files (one bad) are taken in and mapped, windows are
 * trimmed with the mouse and with keys, one is set aside, one is added; the fit is saved, found
 * again with the same numbers, and made again by the headless command.
 */
import { execFile } from "node:child_process";
import { mkdtempSync, readFileSync, rmSync, writeFileSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { promisify } from "node:util";
import { expect, type Page, test } from "@playwright/test";
import type { Result, ResultWindow } from "#app/engine/types.ts";
import { listRecordings, makeRecordingFile } from "../../scripts/demo/scenario.ts";
import { demoAddress, signInToDemo } from "../support/demo-page.ts";

const root = join(import.meta.dirname, "..", "..");
/** Another seed than the demo's, so that the lab does not know these bytes yet. */
const SEED = Number(process.env.OGEE_TEST_SEED ?? 7701);

/** W06 with a tight wrap, as the demo's own, in a second repetition. */
function goodFile(): Buffer {
  const scenario = listRecordings().find(({ fileName }) => fileName === "w06_tight_a.csv");
  if (!scenario) throw new Error("The scenario has no tight wrap of W06.");
  return Buffer.from(makeRecordingFile(scenario, SEED));
}

/** The same with a cell too few in line 204. */
function badFile(): Buffer {
  const lines = goodFile().toString().split("\r\n");
  lines[203] = (lines[203] as string).split(",").slice(0, 4).join(",");
  return Buffer.from(lines.join("\r\n"));
}

async function openTakeIn(page: Page): Promise<void> {
  await page.getByRole("link", { name: "Studies" }).click();
  await page.getByRole("link", { name: "Wrist wraps and stiffness" }).first().click();
  await page.getByRole("link", { name: "Take in", exact: true }).click();
  await expect(page.getByRole("heading", { level: 1 })).toContainText("Take in");
}

/** Numbers of the drawer as they stand there, by their row. */
async function drawerNumbers(page: Page): Promise<string[]> {
  const drawer = page.getByRole("complementary", { name: "The chosen window" });
  return drawer.locator("table").first().locator("tbody tr").allInnerTexts();
}

async function choose(page: Page, window: number): Promise<void> {
  await page.getByRole("button", { name: new RegExp(`^Window ${window} ?,`) }).click();
  await expect(page.getByRole("heading", { name: new RegExp(`^Window ${window},`) })).toBeVisible();
}

test("from two files, one of them bad, to a saved fit that the headless command makes again", async ({
  page,
}) => {
  test.setTimeout(240_000);
  const folder = mkdtempSync(join(tmpdir(), "ogee-main-job-"));
  const failures: string[] = [];
  page.on("pageerror", (error) => failures.push(String(error)));

  await signInToDemo(page, "biomechanist");
  await openTakeIn(page);
  const raw = goodFile();
  await page.getByLabel("Choose recordings").setInputFiles([
    { name: "w06_tight_c.csv", mimeType: "text/csv", buffer: badFile() },
    { name: "w06_tight_b.csv", mimeType: "text/csv", buffer: raw },
  ]);

  // The bad one names its line; the good one goes on.
  const files = page.getByRole("list", { name: "Files" });
  const bad = files.getByRole("listitem").filter({ hasText: "w06_tight_c.csv" });
  const good = files.getByRole("listitem").filter({ hasText: "w06_tight_b.csv" });
  await expect(bad).toContainText(/refused|line 204/);
  await expect(bad).toContainText("204");

  // Participant, condition and posture come from the name and the study; the map from the rig.
  await good.getByRole("button", { name: "w06_tight_b.csv", exact: true }).click();
  const drawer = page.getByRole("complementary", { name: "The chosen file" });
  await expect(drawer.getByRole("heading", { name: "w06_tight_b.csv" })).toBeVisible();
  for (const [label, column] of [
    ["Time", "t (ms)"],
    ["flexion–extension angle", "ang_fe (deg)"],
    ["flexion–extension torque", "trq_fe (N.m)"],
    ["radial–ulnar deviation angle", "ang_ru (deg)"],
  ] as const) {
    const chosen = drawer.getByLabel(label, { exact: true }).locator("option:checked");
    await expect(chosen).toHaveText(column);
  }
  await expect(drawer).toContainText(/First movement: at \d/);
  await expect(drawer).toContainText("a spring gives K > 0");
  for (const axis of ["flexion–extension", "radial–ulnar deviation"]) {
    await drawer.getByRole("button", { name: new RegExp(`^Confirm.*${axis}`) }).click();
  }
  await page.getByLabel("Day of the visit of w06_tight_b.csv").fill("2026-10-15");
  await page.getByRole("button", { name: "Take in 1 file" }).click();
  const link = good.getByRole("link").first();
  await expect(link).toBeVisible({ timeout: 60_000 });
  await expect(good).toContainText("ready");
  await link.click();

  // Every ramp is found and marked: five in each direction about either axis.
  await expect(page.getByRole("heading", { level: 1 })).toContainText("W06, tight");
  const residuals = page.getByRole("region", { name: "Residuals of all windows" });
  await expect(residuals).toBeVisible({ timeout: 30_000 });
  await expect(page.getByText("10 windows", { exact: true }).first()).toBeVisible();

  // With the mouse: the end of window 1, a few milliseconds earlier. The numbers follow.
  await choose(page, 1);
  const before = await drawerNumbers(page);
  const end = page.getByRole("slider", { name: "End of the window" }).first();
  const box = await end.boundingBox();
  if (!box) throw new Error("The window has no handle.");
  const [x, y] = [box.x + box.width / 2, box.y + box.height / 2];
  await page.mouse.move(x, y);
  await page.mouse.down();
  await page.mouse.move(x - 4, y, { steps: 4 });
  await page.mouse.move(x - 9, y, { steps: 4 });
  await page.mouse.up();
  const endMs = Number(await end.getAttribute("aria-valuenow"));
  expect(endMs).toBeLessThan(29);
  expect(endMs).toBeGreaterThan(20);
  await expect.poll(() => drawerNumbers(page)).not.toEqual(before);

  // With keys: window 2, two samples and ten samples earlier, one step undone and done again.
  await choose(page, 2);
  await end.focus();
  await page.keyboard.press("ArrowLeft");
  await page.keyboard.press("ArrowLeft");
  await page.keyboard.press("Shift+ArrowLeft");
  const trimmed = await end.getAttribute("aria-valuenow");
  expect(Number(trimmed)).toBe(24);
  await page.getByRole("button", { name: /^Undo/ }).click();
  await expect(end).not.toHaveAttribute("aria-valuenow", trimmed ?? "");
  await page.getByRole("button", { name: /^Redo/ }).click();
  await expect(end).toHaveAttribute("aria-valuenow", trimmed ?? "");

  // One set aside with a reason.
  await choose(page, 3);
  await page.keyboard.press("x");
  const aside = page.getByRole("dialog");
  await aside.getByLabel("Another reason", { exact: true }).check();
  await aside.getByLabel("Another reason, in a sentence").fill("The hand slid in its cuff.");
  await aside.getByRole("button", { name: "Set window 3 aside" }).click();
  await expect(page.getByRole("complementary", { name: "The chosen window" })).toContainText(
    "The hand slid in its cuff.",
  );

  // One added by hand, in a quiet stretch before the first ramp.
  await page.keyboard.press("a");
  const add = page.getByRole("dialog");
  await add.getByLabel("Onset of the movement").fill("0.8");
  await add.getByRole("button", { name: "Add this window" }).click();
  await expect(page.getByText("11 windows", { exact: true }).first()).toBeVisible();

  // What is not saved survives a reload.
  await expect(page.getByText(/4 edits not saved/).first()).toBeVisible();
  await page.reload();
  await expect(residuals).toBeVisible({ timeout: 30_000 });
  await expect(page.getByText(/4 edits not saved/).first()).toBeVisible();
  await expect(page.getByText("11 windows", { exact: true }).first()).toBeVisible();

  await page.getByRole("button", { name: /^Save 21 windows/ }).click();
  const openFit = page.getByRole("link", { name: "Fit 1" });
  await expect(openFit).toBeVisible({ timeout: 30_000 });
  await expect(page.getByText("unverified")).toHaveCount(0, { timeout: 60_000 });

  // The same numbers after a reload.
  await choose(page, 2);
  const saved = await drawerNumbers(page);
  await page.reload();
  await expect(residuals).toBeVisible({ timeout: 30_000 });
  await choose(page, 2);
  await expect.poll(() => drawerNumbers(page)).toEqual(saved);

  // PROTOCOL and WINDOWS as exported make the same fit without the screen.
  await openFit.click();
  await expect(page).toHaveURL(/\/fits\//);
  const fitAddress = page.url();
  const stored: Result = JSON.parse(await download(page, `${fitAddress}/result.json`));
  writeFileSync(join(folder, "w06_tight_b.csv"), raw);
  for (const name of ["protocol.json", "windows.json"]) {
    writeFileSync(join(folder, name), await download(page, `${fitAddress}/${name}`));
  }
  const made = await analyzeHeadless(folder);
  expect(made.protocol_sha256).toBe(stored.protocol_sha256);
  expect(made.windows).toHaveLength(21);
  expect(made.windows.filter((window) => !window.included).map((w) => w.reason)).toContain(
    "The hand slid in its cuff.",
  );
  expectSameNumbers(made, stored, "result");
  const second = made.windows.filter((window) => window.axis === "FE")[2] as ResultWindow;
  expect(second.window_ms).toEqual([0, 24]);

  expect(failures).toEqual([]);
  rmSync(folder, { recursive: true });
});

async function download(page: Page, address: string): Promise<string> {
  const answer = await page.request.get(address);
  expect(answer.status(), address).toBe(200);
  return answer.text();
}

async function analyzeHeadless(folder: string): Promise<Result> {
  const out = join(folder, "result.json");
  await promisify(execFile)(
    "npm",
    [
      "run",
      "--silent",
      "analyze",
      "--",
      join(folder, "w06_tight_b.csv"),
      "--protocol",
      join(folder, "protocol.json"),
      "--windows",
      join(folder, "windows.json"),
      "--out",
      out,
    ],
    { cwd: root },
  );
  return JSON.parse(readFileSync(out, "utf8"));
}

/** Every number to 1e-12 relative, everything else exactly; the file is named as it was given. */
function expectSameNumbers(made: unknown, stored: unknown, path: string): void {
  if (path.endsWith(".file")) return;
  if (typeof made === "number" && typeof stored === "number") {
    const scale = Math.max(Math.abs(made), Math.abs(stored));
    expect(Math.abs(made - stored), path).toBeLessThanOrEqual(1e-12 * scale);
    return;
  }
  if (typeof made === "object" && made !== null && typeof stored === "object" && stored !== null) {
    expect(Object.keys(made).sort(), path).toEqual(Object.keys(stored).sort());
    for (const [key, value] of Object.entries(made)) {
      expectSameNumbers(value, (stored as Record<string, unknown>)[key], `${path}.${key}`);
    }
    return;
  }
  expect(made, path).toEqual(stored);
}

test("a stranger is sent to sign in, and a member without the role is refused", async ({
  page,
}) => {
  await page.goto(`${demoAddress()}/studies`);
  await expect(page).toHaveURL(/\/sign-in\?to=/);
  await signInToDemo(page, "analyst");
  await page.goto(`${demoAddress()}/studies`);
  await page.getByRole("link", { name: "Wrist wraps and stiffness" }).first().click();
  await page.waitForURL(/\/studies\/[^/]+$/);
  await expect(page.getByRole("link", { name: "Take in", exact: true })).toHaveCount(0);
  const refused = await page.goto(`${page.url().replace(/[?#].*$/, "")}/take-in`);
  expect(refused?.status()).toBe(403);
  await expect(page.getByText(/role biomechanist/)).toBeVisible();
  const missing = await page.goto(`${demoAddress()}/recordings/no-such-recording`);
  expect(missing?.status()).toBe(404);
});
