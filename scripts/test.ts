/**
 * Everything: unit and workflow tests, then the browser's. The last line says how many passed and
 * failed; the line before it what was skipped and why.
 */
import { spawn } from "node:child_process";
import { existsSync, mkdirSync, readFileSync, rmSync } from "node:fs";
import { join } from "node:path";
import { findChromium } from "./chromium.ts";

const root = join(import.meta.dirname, "..");
const reports = join(root, "test-results");

interface Count {
  passed: number;
  failed: number;
  skipped: { title: string; reason: string }[];
}

async function main(): Promise<number> {
  mkdirSync(reports, { recursive: true });
  const total: Count = { passed: 0, failed: 0, skipped: [] };
  add(total, await runVitest());
  const chromium = findChromium();
  if (chromium) {
    add(total, await runBrowserTests(chromium));
  } else {
    console.error(
      "The browser tests need Chromium. On Debian: apt-get install chromium. Elsewhere: set CHROMIUM_PATH to its executable.",
    );
    total.failed += 1;
  }
  const reasons = total.skipped.map((test) => `${test.title}: ${test.reason}`).join("; ");
  console.log(`${total.skipped.length} skipped: ${reasons || "none"}`);
  console.log(`${total.passed} passed, ${total.failed} failed`);
  return total.failed === 0 && total.passed > 0 ? 0 : 1;
}

function add(total: Count, part: Count): void {
  total.passed += part.passed;
  total.failed += part.failed;
  total.skipped.push(...part.skipped);
}

interface VitestReport {
  numPassedTests: number;
  numFailedTests: number;
  numFailedTestSuites: number;
  testResults: {
    status: string;
    assertionResults: { status: string; fullName: string }[];
  }[];
}

async function runVitest(): Promise<Count> {
  const file = join(reports, "vitest.json");
  rmSync(file, { force: true });
  const code = await run("node_modules/vitest/vitest.mjs", [
    "run",
    "--reporter=dot",
    "--reporter=json",
    `--outputFile.json=${file}`,
  ]);
  const report = readReport<VitestReport>(file);
  if (!report) return { passed: 0, failed: 1, skipped: [] };
  const assertions = report.testResults.flatMap((suite) => suite.assertionResults);
  const failed = assertions.filter((test) => test.status === "failed").length;
  // A file that does not load has no assertions, yet it failed.
  const broken = report.testResults.filter(
    (suite) =>
      suite.status === "failed" && !suite.assertionResults.some((t) => t.status === "failed"),
  ).length;
  return {
    passed: assertions.filter((test) => test.status === "passed").length,
    failed: failed + broken + (code !== 0 && failed + broken === 0 ? 1 : 0),
    skipped: assertions
      .filter((test) => ["skipped", "pending", "todo"].includes(test.status))
      .map((test) => ({ title: test.fullName, reason: "not available on this machine" })),
  };
}

interface BrowserSuite {
  suites?: BrowserSuite[];
  specs?: {
    title: string;
    tests: { status: string; annotations: { type: string; description?: string }[] }[];
  }[];
}

async function runBrowserTests(chromium: string): Promise<Count> {
  const file = join(reports, "browser.json");
  rmSync(file, { force: true });
  const code = await run("node_modules/@playwright/test/cli.js", ["test", "--reporter=list,json"], {
    PLAYWRIGHT_JSON_OUTPUT_NAME: file,
    CHROMIUM_PATH: chromium,
  });
  const report = readReport<BrowserSuite>(file);
  const count: Count = { passed: 0, failed: 0, skipped: [] };
  if (report) countSuite(report, count);
  if (code !== 0 && count.failed === 0) count.failed = 1;
  return count;
}

function countSuite(suite: BrowserSuite, count: Count): void {
  for (const child of suite.suites ?? []) countSuite(child, count);
  for (const spec of suite.specs ?? []) {
    for (const test of spec.tests) {
      if (test.status === "expected" || test.status === "flaky") count.passed += 1;
      else if (test.status === "skipped") {
        const reason = test.annotations.find((note) => note.type === "skip")?.description;
        count.skipped.push({ title: spec.title, reason: reason ?? "no reason given" });
      } else count.failed += 1;
    }
  }
}

function readReport<T>(file: string): T | null {
  return existsSync(file) ? (JSON.parse(readFileSync(file, "utf8")) as T) : null;
}

/** Runs one of the project's own tools under this Node.js and hands its output through. */
function run(tool: string, args: string[], env: Record<string, string> = {}): Promise<number> {
  return new Promise((resolve) => {
    const child = spawn(process.execPath, [join(root, tool), ...args], {
      cwd: root,
      stdio: ["ignore", "inherit", "inherit"],
      env: { ...process.env, ...env },
    });
    child.on("close", (code) => resolve(code ?? 1));
  });
}

process.exitCode = await main();
