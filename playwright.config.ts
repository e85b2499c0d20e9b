import { defineConfig } from "@playwright/test";
import { CHROMIUM_ARGS, findChromium } from "./scripts/chromium.ts";

export default defineConfig({
  testDir: "tests/e2e",
  outputDir: "test-results/browser",
  globalSetup: "./tests/support/start-demo.ts",
  // One application with one database serves all of them.
  workers: 1,
  fullyParallel: false,
  retries: 0,
  timeout: 90_000,
  expect: { timeout: 15_000 },
  use: {
    browserName: "chromium",
    viewport: { width: 1280, height: 860 },
    locale: "en-GB",
    actionTimeout: 20_000,
    trace: "retain-on-failure",
    launchOptions: { executablePath: findChromium() ?? undefined, args: CHROMIUM_ARGS },
  },
});
