/**
 * Runs the demo in a folder of its own for the browser tests, and ends it after them. Where
 * OGEE_TEST_ADDRESS and OGEE_TEST_SIGN_INS name a demo that runs already, that one is used.
 */
import { join } from "node:path";
import { runDemo } from "../../scripts/demo/run-demo.ts";

export default async function startDemo(): Promise<() => Promise<void>> {
  if (process.env.OGEE_TEST_ADDRESS) return async () => {};
  const folder = join(import.meta.dirname, "..", "..", "test-results", "browser-data");
  // A shell that names a real installation: the demo must not write there (it would not start).
  const demo = await runDemo(folder, { DATABASE_URL: "libsql://installation.invalid" });
  process.env.OGEE_TEST_ADDRESS = demo.address;
  process.env.OGEE_TEST_SIGN_INS = JSON.stringify(demo.signIns);
  return demo.stop;
}
