import { resolve } from "node:path";
import { pathToFileURL } from "node:url";
import { z } from "zod";

/** The environment, checked once at start; README names every setting. */
export interface Env {
  host: string;
  port: number;
  /** As browsers reach the application; decides whether cookies need https. */
  publicUrl: URL;
  /** Folder of the embedded database and of what this machine keeps. */
  dataFolder: string;
  databaseUrl: string;
  databaseAuthToken: string | undefined;
  /** Null on this machine alone, where one is made and kept in the data folder. */
  sessionSecret: string | null;
  /** Accounts without a second factor: only where nobody else reaches the server. */
  isDemo: boolean;
  storage: StorageEnv;
}

export interface StorageEnv {
  endpoint: string;
  region: string;
  bucket: string;
  accessKeyId: string;
  secretAccessKey: string;
}

/** What is wrong with the environment, one sentence for each setting. */
export class EnvError extends Error {
  override name = "EnvError";
  constructor(readonly sentences: readonly string[]) {
    super(sentences.join("\n"));
  }
}

/** Characters of a session secret. */
export const SHORTEST_SECRET = 32;

const LOOPBACK = ["127.0.0.1", "localhost", "::1"];

function webAddress(example: string) {
  return z
    .url({ protocol: /^https?$/, error: `must be a web address, such as ${example}` })
    .transform((text) => new URL(text));
}

const settings = z.object({
  HOST: z.string().default("127.0.0.1"),
  PORT: z.coerce
    .number({ error: "must be a number from 1 to 65535" })
    .int("must be a whole number")
    .min(1, "must be a number from 1 to 65535")
    .max(65_535, "must be a number from 1 to 65535")
    .default(4300),
  PUBLIC_URL: webAddress("https://ogee.example").optional(),
  OGEE_DATA: z.string().default(".data/local"),
  DATABASE_URL: z
    .string()
    .regex(/^(file|libsql|https?|wss?):/, "must start with file:, libsql:, https: or wss:")
    .optional(),
  DATABASE_AUTH_TOKEN: z.string().optional(),
  SESSION_SECRET: z
    .string()
    .min(SHORTEST_SECRET, `must have at least ${SHORTEST_SECRET} characters`)
    .optional(),
  OGEE_DEMO: z.enum(["0", "1"], "must be 1 for the demo, or be left out").default("0"),
  S3_ENDPOINT: webAddress("https://storage.example").optional(),
  S3_REGION: z.string().default("us-east-1"),
  S3_BUCKET: z.string().optional(),
  S3_ACCESS_KEY_ID: z.string().optional(),
  S3_SECRET_ACCESS_KEY: z.string().optional(),
});

/**
 * Reads the settings; what is left out has a value that serves a run on this machine alone.
 *
 * @param source  usually `process.env`; an empty text counts as left out
 * @throws EnvError
 */
export function readEnv(source: Record<string, string | undefined>): Env {
  const given = Object.fromEntries(Object.entries(source).filter(([, value]) => value));
  const parsed = settings.safeParse(given);
  if (!parsed.success) {
    throw new EnvError(
      parsed.error.issues.map((issue) => `${issue.path.join(".")} ${issue.message}.`),
    );
  }
  const env = parsed.data;
  const isLoopback = LOOPBACK.includes(env.HOST);
  const wrong: string[] = [];
  const publicHost = env.PUBLIC_URL?.hostname ?? env.HOST;
  if (env.OGEE_DEMO === "1" && !(isLoopback && LOOPBACK.includes(unbracketed(publicHost)))) {
    wrong.push(
      "OGEE_DEMO turns the second factor off: it needs HOST and PUBLIC_URL to name this machine " +
        `alone (127.0.0.1), and they name ${env.HOST} and ${publicHost}.`,
    );
  }
  if (!isLoopback) {
    const needed = {
      PUBLIC_URL: "the address by which browsers reach the application",
      SESSION_SECRET: "32 or more random characters, the same at every start",
      S3_ENDPOINT: "the address of the storage for recordings",
    };
    for (const [name, what] of Object.entries(needed)) {
      if (given[name] === undefined) {
        wrong.push(`${name} is missing: with HOST ${env.HOST}, set it to ${what}.`);
      }
    }
  }
  // A storage that is named is never entered with the keys of a local one.
  if (env.S3_ENDPOINT !== undefined) {
    for (const name of ["S3_BUCKET", "S3_ACCESS_KEY_ID", "S3_SECRET_ACCESS_KEY"] as const) {
      if (env[name] === undefined) wrong.push(`${name} is missing: S3_ENDPOINT needs it.`);
    }
  }
  if (wrong.length > 0) throw new EnvError(wrong);

  const dataFolder = resolve(env.OGEE_DATA);
  return {
    host: env.HOST,
    port: env.PORT,
    publicUrl: env.PUBLIC_URL ?? new URL(`http://${hostInUrl(env.HOST)}:${env.PORT}`),
    dataFolder,
    databaseUrl: env.DATABASE_URL ?? pathToFileURL(resolve(dataFolder, "ogee.db")).href,
    databaseAuthToken: env.DATABASE_AUTH_TOKEN,
    sessionSecret: env.SESSION_SECRET ?? null,
    isDemo: env.OGEE_DEMO === "1",
    // Left out, the bucket and keys are those of s3rver, which serves tests and trials on one machine.
    storage: {
      endpoint: (env.S3_ENDPOINT ?? new URL("http://127.0.0.1:4568")).origin,
      region: env.S3_REGION,
      bucket: env.S3_BUCKET ?? "ogee",
      accessKeyId: env.S3_ACCESS_KEY_ID ?? "S3RVER",
      secretAccessKey: env.S3_SECRET_ACCESS_KEY ?? "S3RVER",
    },
  };
}

function unbracketed(hostname: string): string {
  return hostname.replace(/^\[(.*)\]$/, "$1");
}

function hostInUrl(host: string): string {
  return host.includes(":") ? `[${host}]` : host;
}
