/** Clears the demo's data folder. */
import { existsSync, rmSync } from "node:fs";
import { join, resolve } from "node:path";

const data = resolve(process.env.OGEE_DATA ?? join(import.meta.dirname, "..", ".data", "demo"));
// Only a folder that a demo made: a wrong OGEE_DATA must not clear somebody's disk.
if (existsSync(data) && !existsSync(join(data, "demo.json"))) {
  console.error(`${data} was not made by the demo: nothing is cleared.`);
  process.exit(1);
}
rmSync(data, { recursive: true, force: true });
console.log(`Cleared ${data}`);
