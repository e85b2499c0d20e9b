/**
 * The demo: builds if needed, starts a storage and a mail catcher on this machine, migrates, seeds
 * the invented study and serves until stopped. Everything it keeps stands in one folder.
 */
import { type ChildProcess, spawn, spawnSync } from "node:child_process";
import { existsSync, mkdirSync, readdirSync, readFileSync, statSync, writeFileSync } from "node:fs";
import { join, resolve } from "node:path";
import { startMailCatcher } from "./demo/mail-catcher.ts";
import { findFreePort, isFree } from "./demo/ports.ts";
import { DEMO_PEOPLE, seedDemo } from "./demo/seed.ts";
import { BUCKET, FAKE_KEYS, startStorageFake } from "./demo/storage-fake.ts";

const root = join(import.meta.dirname, "..");
const LAST_PORT = 65_535;

async function main(): Promise<void> {
  const data = resolve(process.env.OGEE_DATA ?? join(root, ".data", "demo"));
  markFolder(data);
  buildIfNeeded();

  const port = await choosePort();
  const address = `http://127.0.0.1:${port}`;
  const besides = (far: number) => findFreePort(port + far <= LAST_PORT ? port + far : port - far);
  const storage = await startStorageFake({
    directory: join(data, "storage"),
    port: await besides(1000),
    pageOrigin: address,
  });
  const mail = await startMailCatcher({
    smtp: await besides(2000),
    page: await besides(3000),
  });
  const env: Record<string, string> = {
    NODE_ENV: "production",
    HOST: "127.0.0.1",
    PORT: String(port),
    PUBLIC_URL: address,
    OGEE_DATA: data,
    OGEE_DEMO: "1",
    // Whatever this shell names: the invented study goes into the demo's own folder.
    DATABASE_URL: "",
    DATABASE_AUTH_TOKEN: "",
    S3_ENDPOINT: storage.endpoint,
    S3_REGION: "us-east-1",
    S3_BUCKET: BUCKET,
    S3_ACCESS_KEY_ID: FAKE_KEYS.accessKeyId,
    S3_SECRET_ACCESS_KEY: FAKE_KEYS.secretAccessKey,
    SMTP_URL: mail.smtpUrl,
    MAIL_FROM: "ogee@ogee.example",
    SESSION_SECRET: "the demo keeps no secrets: it is bound to loopback",
  };

  let server: ChildProcess | null = null;
  let stopping = false;
  const stop = async (code: number) => {
    if (stopping) return;
    stopping = true;
    if (server && server.exitCode === null) {
      const ended = new Promise<void>((done) => server?.once("close", () => done()));
      server.kill("SIGTERM");
      await ended;
    }
    await mail.stop();
    await storage.stop();
    process.exit(code);
  };
  // A terminal that is closed hangs up; the server, in a group of its own, would stay.
  for (const signal of ["SIGINT", "SIGTERM", "SIGHUP"]) process.on(signal, () => void stop(0));

  try {
    // Once: what a person changed in the demo since is theirs.
    if (!isFilled(data)) {
      await seedDemo({ ...process.env, ...env }, (line) => console.log(line));
      markFilled(data);
    }
    if (stopping) return;
    // In a process group of its own: Ctrl-C reaches this parent alone, which ends it in order.
    server = spawn(process.execPath, ["--import", "tsx", "scripts/start.ts"], {
      cwd: root,
      env: { ...process.env, ...env },
      stdio: ["ignore", "inherit", "inherit"],
      detached: true,
    });
    server.once("exit", (code) => {
      if (stopping) return;
      console.error(`The server ended by itself (exit ${code}).`);
      void stop(1);
    });
    await waitUntilReady(address, () => stopping);
  } catch (error) {
    if (!stopping) console.error(error);
    await stop(1);
  }
  if (stopping) return;
  for (const person of DEMO_PEOPLE) {
    console.log(`sign-in ${person.role} ${person.email} ${person.password}`);
  }
  console.log(`mail ${mail.pageUrl}`);
  console.log(`ready ${address}`);
}

const MARK = "demo.json";

/** Says in the folder that it is the demo's, so that a reset knows what it may clear. */
function markFolder(data: string): void {
  const mark = join(data, MARK);
  if (existsSync(mark)) return;
  if (existsSync(data) && readdirSync(data).length > 0) {
    throw new Error(
      `${data} holds something else than the demo: name another folder in OGEE_DATA.`,
    );
  }
  mkdirSync(data, { recursive: true });
  writeMark(data, { isFilled: false });
}

/** Whether the invented study stands there whole; a start that was interrupted goes on with it. */
function isFilled(data: string): boolean {
  return JSON.parse(readFileSync(join(data, MARK), "utf8")).isFilled === true;
}

function markFilled(data: string): void {
  writeMark(data, { isFilled: true });
}

function writeMark(data: string, state: { isFilled: boolean }): void {
  writeFileSync(join(data, MARK), `${JSON.stringify({ madeBy: "npm run demo", ...state })}\n`);
}

/** PORT where it is set (and then it must be free), else 4300 or the next free one. */
async function choosePort(): Promise<number> {
  const asked = process.env.PORT;
  if (!asked) return findFreePort(4300);
  const port = Number(asked);
  if (!Number.isInteger(port) || port < 1 || port > LAST_PORT) {
    throw new Error(`PORT is "${asked}": give a number from 1 to ${LAST_PORT}.`);
  }
  if (!(await isFree(port))) {
    throw new Error(`Port ${port} is taken: set PORT to another, or leave it out.`);
  }
  return port;
}

/** Builds where there is no build, or where a source is newer than it. */
function buildIfNeeded(): void {
  const built = join(root, "build", "server", "index.js");
  if (existsSync(built) && statSync(built).mtimeMs > newestSource()) return;
  console.log("Building the application.");
  const build = spawnSync(
    process.execPath,
    [join(root, "node_modules/@react-router/dev/bin.js"), "build"],
    { cwd: root, stdio: ["ignore", "ignore", "inherit"] },
  );
  if (build.status !== 0) throw new Error("The application could not be built; see above.");
}

function newestSource(): number {
  const files = ["app", "public"].flatMap((folder) =>
    readdirSync(join(root, folder), { recursive: true, withFileTypes: true })
      .filter((entry) => entry.isFile())
      .map((entry) => join(entry.parentPath, entry.name)),
  );
  const settings = ["package-lock.json", "vite.config.ts", "react-router.config.ts"];
  return Math.max(
    ...[...files, ...settings.map((name) => join(root, name))].map(
      (path) => statSync(path).mtimeMs,
    ),
  );
}

async function waitUntilReady(address: string, gaveUp: () => boolean): Promise<void> {
  const until = Date.now() + 60_000;
  while (Date.now() < until && !gaveUp()) {
    const answer = await fetch(`${address}/ready`).catch(() => null);
    if (answer?.ok) return;
    await new Promise((next) => setTimeout(next, 100));
  }
  if (!gaveUp()) throw new Error(`The server did not answer at ${address}/ready within a minute.`);
}

main().catch((error: unknown) => {
  console.error(error instanceof Error ? error.message : error);
  process.exit(1);
});
