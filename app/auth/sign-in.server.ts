import { createHmac, randomBytes } from "node:crypto";
import { Authenticator } from "remix-auth";
import { FormStrategy } from "remix-auth-form";
import type { Store } from "#app/db/client.server.ts";
import { recordEvent } from "#app/db/events.server.ts";
import { findPersonByEmail, listMemberships } from "#app/db/people.server.ts";
import { emailSchema } from "#app/domain/person.ts";
import type { Clock } from "#app/services/clock.server.ts";
import { hashPassword, verifyPassword } from "./password.server.ts";
import type { SessionContent } from "./session.server.ts";
import { openSignInLimits } from "./sign-in-limits.server.ts";

export type SignedIn = SessionContent;

/** Why nobody was signed in, as the page says it. */
export class SignInRefusal extends Error {
  override name = "SignInRefusal";
  readonly status: 400 | 401 | 429;
  readonly errors: { form?: string; email?: string; password?: string };
  /** What was typed, to stand in the field again. */
  readonly email: string;
  /** How long to wait, s; null where waiting changes nothing. */
  readonly waitS: number | null;

  constructor(
    status: 400 | 401 | 429,
    errors: SignInRefusal["errors"],
    email: string,
    waitS: number | null = null,
  ) {
    super(Object.values(errors).join(" "));
    this.status = status;
    this.errors = errors;
    this.email = email;
    this.waitS = waitS;
  }
}

/** A longer one is not a password that someone set here, and hashing it would cost us time. */
const LONGEST_PASSWORD = 200;

/**
 * Reads the form's `email` and `password`: the request's body must not be read before. The remote
 * address is the network address that the request came from. Throws a `SignInRefusal`.
 */
export type SignIn = (request: Request, remoteAddress: string) => Promise<SignedIn>;

/**
 * Whether an address is known shows neither in the answer nor in the time that it takes: the
 * password for an unknown one is compared with a password that nobody has.
 *
 * @param secret  keys the hash that stands for an unknown address in the events
 */
export async function openSignIn(
  { store, clock }: { store: Store; clock: Clock },
  secret: string,
): Promise<SignIn> {
  const limits = openSignInLimits();
  const nobodysHash = await hashPassword(randomBytes(32).toString("base64url"));

  async function verify(form: FormData, remoteAddress: string): Promise<SignedIn> {
    const typed = String(form.get("email") ?? "");
    const password = String(form.get("password") ?? "");
    const parsed = emailSchema.safeParse(typed);
    if (!parsed.success || password === "") {
      throw new SignInRefusal(400, mistakes(typed, password, parsed.error?.issues), typed);
    }
    const email = parsed.data;

    const waitS = await limits.count(remoteAddress, email);
    if (waitS !== null) {
      const form = `Too many tries with this address. Wait ${inWords(waitS)}, then try again.`;
      throw new SignInRefusal(429, { form }, typed, waitS);
    }

    const person = await findPersonByEmail(store.db, email);
    const isRight = await verifyPassword(
      person?.passwordHash ?? nobodysHash,
      password.slice(0, LONGEST_PASSWORD + 1),
    );
    if (person === null || !isRight) {
      await store.write((tx) =>
        recordEvent(tx, {
          at: clock.now(),
          labId: null,
          personId: null,
          kind: "person.sign_in_refused",
          objectType: person === null ? "unknown_address" : "person",
          // A keyed hash: tries with the same address can be counted, the address cannot be read.
          objectId: person?.id ?? createHmac("sha256", secret).update(email).digest("hex"),
        }),
      );
      const form = "This e-mail address and this password do not belong together. Check both.";
      throw new SignInRefusal(401, { form }, typed);
    }

    await limits.giveBack(remoteAddress, email);
    const [first, second] = await listMemberships(store.db, person.id);
    const labId = first !== undefined && second === undefined ? first.lab.id : null;
    return { personId: person.id, labId };
  }

  return (request, remoteAddress) =>
    new Authenticator<SignedIn>()
      .use(new FormStrategy<SignedIn>(({ form }) => verify(form, remoteAddress)))
      .authenticate("form", request);
}

function mistakes(
  email: string,
  password: string,
  issues: readonly { message: string }[] = [],
): SignInRefusal["errors"] {
  const [issue] = issues;
  const errors: SignInRefusal["errors"] = {};
  if (email.trim() === "") errors.email = "Type your e-mail address.";
  else if (issue !== undefined) errors.email = issue.message;
  if (password === "") errors.password = "Type your password.";
  return errors;
}

function inWords(waitS: number): string {
  if (waitS < 90) return waitS === 1 ? "1 second" : `${waitS} seconds`;
  return `${Math.ceil(waitS / 60)} minutes`;
}
