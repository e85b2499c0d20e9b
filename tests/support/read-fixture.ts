import { readFileSync } from "node:fs";
import { join } from "node:path";

/** A JSON file of `fixtures/`; its folder's ORIGIN.md says where the numbers come from. */
export function readFixture<T>(folder: string, file: string): T {
  const path = join(import.meta.dirname, "../../fixtures", folder, file);
  return JSON.parse(readFileSync(path, "utf8")) as T;
}
