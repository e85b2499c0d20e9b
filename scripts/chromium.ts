import { spawnSync } from "node:child_process";
import { existsSync } from "node:fs";

/** The Chromium of this machine: the one that CHROMIUM_PATH names, or a usual one, or null. */
export function findChromium(): string | null {
  const named = process.env.CHROMIUM_PATH;
  if (named) return existsSync(named) ? named : null;
  for (const name of ["chromium", "chromium-browser", "google-chrome", "google-chrome-stable"]) {
    const found = spawnSync("which", [name], { encoding: "utf8" });
    const path = found.status === 0 ? found.stdout.trim() : "";
    if (path) return path;
  }
  return null;
}

/** What a headless run on a machine without a desktop or an outside network needs. */
export const CHROMIUM_ARGS = [
  "--no-sandbox",
  "--disable-gpu",
  "--disable-quic",
  "--no-first-run",
  "--disable-background-networking",
  "--disable-component-update",
  "--disable-sync",
];
