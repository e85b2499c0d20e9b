import type { Store } from "#app/db/client.server.ts";
import type { Clock } from "#app/services/clock.server.ts";
import { openSessions, type Sessions } from "./session.server.ts";
import { openSignIn, type SignIn } from "./sign-in.server.ts";

/** Who may come in, and how. */
export interface Gate {
  sessions: Sessions;
  signIn: SignIn;
  /** The demo's accounts need none; the sign-in page says so. */
  isSecondFactorOff: boolean;
}

export interface GateOptions {
  sessionSecret: string;
  /** Whether browsers reach the application by https. */
  secureCookies: boolean;
  isDemo: boolean;
}

export async function openGate(
  desk: { store: Store; clock: Clock },
  options: GateOptions,
): Promise<Gate> {
  return {
    sessions: openSessions(desk, { secret: options.sessionSecret, secure: options.secureCookies }),
    signIn: await openSignIn(desk, options.sessionSecret),
    isSecondFactorOff: options.isDemo,
  };
}
