/** Makes the first lab of an installation and its manager. */
import { once } from "node:events";
import { createInterface } from "node:readline";
import { Writable } from "node:stream";
import { parseArgs } from "node:util";
import { z } from "zod";
import { hashPassword } from "#app/auth/password.server.ts";
import {
  emailSchema,
  newPasswordSchema,
  personNameSchema,
  SHORTEST_PASSWORD,
} from "#app/domain/person.ts";
import { ROLES } from "#app/domain/role.ts";
import { EnvError, readEnv } from "#app/env.server.ts";

const USAGE = `npm run first-lab -- --lab NAME --name NAME --email ADDRESS [--roles manager,biomechanist]

Makes a lab and the person who runs it. Roles: ${ROLES.join(", ")} (one or several; without
--roles: manager). The password is asked for; where nobody can be asked, it is read from the first
line of the input, or from OGEE_PASSWORD. It has at least ${SHORTEST_PASSWORD} characters, and is never an argument, which
other people of this machine could read.`;

/** What the caller can mend. */
class UsageError extends Error {}

const optionsSchema = z.object({
  lab: personNameSchema,
  name: personNameSchema,
  email: emailSchema,
  roles: z
    .string()
    .default("manager")
    .transform((text) => text.split(",").map((role) => role.trim()))
    .pipe(
      z
        .array(z.enum(ROLES, `Roles are ${ROLES.join(", ")}, with a comma between.`))
        .refine(
          (roles) => roles.includes("manager"),
          "The first person of a lab is its manager: --roles must name manager.",
        ),
    ),
});

async function main(): Promise<void> {
  const options = readOptions(process.argv.slice(2));
  if (options === null) {
    console.log(USAGE);
    return;
  }
  const password = newPasswordSchema.safeParse(await readPassword());
  if (!password.success) throw new UsageError(firstSentence(password.error));

  const env = readEnv(process.env);
  // Not before: a wrong call is answered at once.
  const { openDesk } = await import("#app/auth/desk.server.ts");
  const { makeLab } = await import("#app/workflows/make-lab.server.ts");
  const desk = await openDesk(env);
  try {
    const made = await makeLab(desk, {
      labName: options.lab,
      person: {
        name: options.name,
        email: options.email,
        passwordHash: await hashPassword(password.data),
      },
      roles: options.roles,
    });
    if (made.status === "name_taken") {
      throw new UsageError(`There is a lab named “${options.lab}” already. Choose another name.`);
    }
    console.log(`The lab “${options.lab}” is made; ${options.email} is its manager.`);
    if (made.hadAccount) console.log("The account was there before and keeps its own password.");
  } finally {
    desk.store.close();
  }
}

function readOptions(args: string[]): z.infer<typeof optionsSchema> | null {
  let values: Record<string, string | boolean | undefined>;
  try {
    ({ values } = parseArgs({
      args,
      options: {
        lab: { type: "string" },
        name: { type: "string" },
        email: { type: "string" },
        roles: { type: "string" },
        help: { type: "boolean", short: "h" },
      },
    }));
  } catch (error) {
    throw new UsageError(`${error instanceof Error ? error.message : error}\n\n${USAGE}`);
  }
  if (values.help) return null;
  for (const name of ["lab", "name", "email"]) {
    if (values[name] === undefined) throw new UsageError(`--${name} is missing.\n\n${USAGE}`);
  }
  const parsed = optionsSchema.safeParse(values);
  if (!parsed.success) throw new UsageError(firstSentence(parsed.error));
  return parsed.data;
}

async function readPassword(): Promise<string> {
  if (process.env.OGEE_PASSWORD) return process.env.OGEE_PASSWORD;
  if (!process.stdin.isTTY) return readLine();
  const first = await readLine("Password: ");
  if (first !== (await readLine("The same again: "))) {
    throw new UsageError("The two passwords differ. Nothing was made; start again.");
  }
  return first;
}

/** One line of the input; where a question is asked, what is typed is not shown. */
async function readLine(question?: string): Promise<string> {
  if (question !== undefined) process.stdout.write(question);
  const silent = new Writable({ write: (_chunk, _encoding, done) => done() });
  const lines = createInterface({
    input: process.stdin,
    output: silent,
    terminal: process.stdin.isTTY,
  });
  const [line] = await Promise.race([once(lines, "line"), once(lines, "close").then(() => [""])]);
  lines.close();
  if (question !== undefined) process.stdout.write("\n");
  return String(line);
}

function firstSentence(error: z.ZodError): string {
  const [issue] = error.issues;
  if (issue === undefined) return "The options could not be read.";
  return issue.message;
}

main().catch((error: unknown) => {
  if (error instanceof UsageError) console.error(error.message);
  else if (error instanceof EnvError) console.error(error.sentences.join("\n"));
  else console.error(error);
  process.exitCode = 1;
});
