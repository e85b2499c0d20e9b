/**
 * Pictures of every screen in both themes and two widths, with one page to look through them. The
 * picture in README comes from the same run: `npm run screens -- --readme` puts it in its place.
 */
import { copyFileSync, mkdirSync, rmSync, writeFileSync } from "node:fs";
import { join } from "node:path";
import { type Browser, chromium, type Page } from "@playwright/test";
import { CHROMIUM_ARGS, findChromium } from "./chromium.ts";
import { type RunningDemo, runDemo } from "./demo/run-demo.ts";

const root = join(import.meta.dirname, "..");
const folder = join(root, "test-results", "screens");
const WIDTHS = [1280, 390] as const;
const THEMES = ["day", "night"] as const;

interface Screen {
  name: string;
  /** Role that looks, or nobody. */
  as: string | null;
  open(page: Page, address: string): Promise<void>;
}

/** Where a study's or a recording's page stands is read from the lists, as a person would. */
async function openStudy(page: Page, address: string, place = ""): Promise<void> {
  await page.goto(`${address}/studies`);
  const link = page.getByRole("link", { name: "Wrist wraps and stiffness" }).first();
  await page.goto(address + (await link.getAttribute("href")) + place);
}

async function openRecording(page: Page, address: string, fileName: string): Promise<void> {
  await openStudy(page, address, "/recordings");
  const link = page.locator('a[href^="/recordings/"]', { hasText: fileName }).first();
  await page.goto(address + (await link.getAttribute("href")));
  await page.getByRole("region", { name: "Residuals of all windows" }).waitFor();
}

async function openFit(page: Page, address: string): Promise<void> {
  await page.goto(`${address}/reviews`);
  const link = page.locator('a[href^="/fits/"]').first();
  await page.goto(address + (await link.getAttribute("href")));
}

const SCREENS: readonly Screen[] = [
  {
    name: "sign-in",
    as: null,
    open: async (page, address) => void (await page.goto(`${address}/sign-in`)),
  },
  {
    name: "sign-in, refused",
    as: null,
    open: async (page, address) => {
      await page.goto(`${address}/sign-in`);
      await page.fill("[name=email]", "nobody@ogee.example");
      await page.fill("[name=password]", "not the password");
      await page.getByRole("button", { name: "Sign in" }).click();
      await page.getByRole("alert").first().waitFor();
    },
  },
  {
    name: "for you",
    as: "biomechanist",
    open: async (page, address) => void (await page.goto(address)),
  },
  {
    name: "for you, reviewer",
    as: "reviewer",
    open: async (page, address) => void (await page.goto(address)),
  },
  {
    name: "studies",
    as: "manager",
    open: async (page, address) => void (await page.goto(`${address}/studies`)),
  },
  {
    name: "new study",
    as: "manager",
    open: async (page, address) => void (await page.goto(`${address}/studies/new`)),
  },
  { name: "study", as: "analyst", open: (page, address) => openStudy(page, address) },
  {
    name: "study, set-up",
    as: "manager",
    open: (page, address) => openStudy(page, address, "/set-up"),
  },
  {
    name: "study, recordings",
    as: "biomechanist",
    open: (page, address) => openStudy(page, address, "/recordings"),
  },
  {
    name: "study, protocols",
    as: "biomechanist",
    open: (page, address) => openStudy(page, address, "/protocols"),
  },
  {
    name: "take in, empty",
    as: "biomechanist",
    open: (page, address) => openStudy(page, address, "/take-in"),
  },
  {
    name: "take in, files",
    as: "biomechanist",
    open: async (page, address) => {
      await openStudy(page, address, "/take-in");
      await page.getByLabel("Choose recordings").setInputFiles(takeInFiles());
      await page.getByText("w06_tight_b.csv").first().waitFor();
      await page.waitForTimeout(2500);
    },
  },
  {
    name: "recording",
    as: "biomechanist",
    open: (page, address) => openRecording(page, address, "w01_firm_a.csv"),
  },
  {
    name: "recording, clipped",
    as: "biomechanist",
    open: (page, address) => openRecording(page, address, "w05_tight-grip_a.csv"),
  },
  {
    name: "recording, without a fit",
    as: "biomechanist",
    open: (page, address) => openRecording(page, address, "w06_firm_a.csv"),
  },
  {
    name: "recording, read only",
    as: "analyst",
    open: (page, address) => openRecording(page, address, "w01_bare_a.csv"),
  },
  {
    name: "reviews",
    as: "reviewer",
    open: async (page, address) => void (await page.goto(`${address}/reviews`)),
  },
  { name: "fit", as: "reviewer", open: openFit },
  { name: "refused", as: "analyst", open: (page, address) => openStudy(page, address, "/take-in") },
  {
    name: "missing",
    as: "analyst",
    open: async (page, address) => void (await page.goto(`${address}/recordings/none`)),
  },
];

/** A good file, one of a left hand's with a decimal comma, and one that is no table. */
function takeInFiles() {
  const rows = (comma: boolean) => {
    const lines = ["t;ang_fe;trq_fe", "ms;deg;N.m"];
    for (let i = 0; i < 4000; i++) {
      const s = Math.min(1, Math.max(0, (i - 1000) / 80));
      const angle = 4 * s * s * s * (10 + s * (6 * s - 15));
      const cells = [(i / 2).toFixed(1), angle.toFixed(4), (0.35 * angle).toFixed(4)];
      lines.push((comma ? cells.map((cell) => cell.replace(".", ",")) : cells).join(";"));
    }
    return Buffer.from(lines.join("\n"));
  };
  return [
    { name: "w06_tight_b.csv", mimeType: "text/csv", buffer: rows(false) },
    { name: "w02_loose_b.csv", mimeType: "text/csv", buffer: rows(true) },
    {
      name: "w06_notes.csv",
      mimeType: "text/csv",
      buffer: Buffer.from("spoke twice\nwalked in at 10:20\n"),
    },
  ];
}

async function main(): Promise<void> {
  const executablePath = findChromium();
  if (!executablePath)
    throw new Error("There is no Chromium: on Debian, apt-get install chromium.");
  rmSync(folder, { recursive: true, force: true });
  mkdirSync(folder, { recursive: true });
  const demo = await runDemo(join(root, "test-results", "screens-data"));
  const browser = await chromium.launch({ executablePath, args: CHROMIUM_ARGS });
  const pictures: string[] = [];
  try {
    for (const theme of THEMES) {
      for (const width of WIDTHS) pictures.push(...(await takeAll(browser, demo, theme, width)));
    }
  } finally {
    await browser.close();
    await demo.stop();
  }
  writeFileSync(join(folder, "index.html"), indexPage(pictures));
  if (process.argv.includes("--readme")) {
    mkdirSync(join(root, "public", "pictures"), { recursive: true });
    copyFileSync(
      join(folder, "recording day 1280.png"),
      join(root, "public", "pictures", "recording.png"),
    );
  }
  console.log(`${pictures.length} screens`);
}

async function takeAll(
  browser: Browser,
  demo: RunningDemo,
  theme: (typeof THEMES)[number],
  width: number,
): Promise<string[]> {
  const taken: string[] = [];
  const roles = [...new Set(SCREENS.map((screen) => screen.as))];
  for (const role of roles) {
    const context = await browser.newContext({
      viewport: { width, height: 860 },
      colorScheme: theme === "night" ? "dark" : "light",
      locale: "en-GB",
    });
    const page = await context.newPage();
    if (role) await signIn(page, demo, role);
    for (const screen of SCREENS.filter((each) => each.as === role)) {
      await screen.open(page, demo.address);
      await page.waitForLoadState("networkidle");
      await page.waitForTimeout(400);
      const name = `${screen.name} ${theme} ${width}.png`;
      await page.screenshot({ path: join(folder, name), fullPage: true });
      taken.push(name);
    }
    await context.close();
  }
  return taken;
}

async function signIn(page: Page, demo: RunningDemo, role: string): Promise<void> {
  const account = demo.signIns[role];
  if (!account) throw new Error(`The demo named no ${role}.`);
  await page.goto(`${demo.address}/sign-in`);
  await page.fill("[name=email]", account.email);
  await page.fill("[name=password]", account.password);
  await page.getByRole("button", { name: "Sign in" }).click();
  await page.waitForURL((url) => url.pathname !== "/sign-in");
}

function indexPage(names: readonly string[]): string {
  const figures = names
    .map((name) => {
      const address = encodeURIComponent(name);
      return `<figure><figcaption>${name}</figcaption><a href="${address}"><img src="${address}" alt="${name}" loading="lazy"></a></figure>`;
    })
    .join("\n");
  return `<!doctype html><html lang="en"><meta charset="utf-8"><title>Screens</title><style>body{font:14px/20px system-ui;margin:16px;display:flex;flex-wrap:wrap;gap:16px}figure{margin:0}img{max-height:480px;border:1px solid #999}</style>${figures}</html>`;
}

main().catch((error: unknown) => {
  console.error(error instanceof Error ? error.message : error);
  process.exit(1);
});
