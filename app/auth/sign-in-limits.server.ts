import { RateLimiterMemory, RateLimiterRes } from "rate-limiter-flexible";

const MINUTE_S = 60;

/** Tries that fail; one that succeeds is given back. */
export interface SignInLimits {
  /** Counts a try before it is made. @returns how long to wait, s, or null where it may be made */
  count(remoteAddress: string, email: string): Promise<number | null>;
  /** The try succeeded. */
  giveBack(remoteAddress: string, email: string): Promise<void>;
}

/**
 * Three counts at once: one address trying one account (guessing), many addresses trying one account
 * (a spread guess), one address trying many accounts (one password everywhere). Kept in memory: a
 * restart forgets them.
 */
export function openSignInLimits(): SignInLimits {
  const pair = new RateLimiterMemory({
    keyPrefix: "pair",
    points: 5,
    duration: 15 * MINUTE_S,
  });
  const account = new RateLimiterMemory({
    keyPrefix: "account",
    points: 30,
    duration: 60 * MINUTE_S,
  });
  const address = new RateLimiterMemory({
    keyPrefix: "address",
    points: 60,
    duration: 15 * MINUTE_S,
  });
  return {
    count: async (remoteAddress, email) => {
      // One after the other: a try that the first count refuses does not use up the others.
      for (const [limit, key] of [
        [pair, `${remoteAddress} ${email}`],
        [address, remoteAddress],
        [account, email],
      ] as const) {
        try {
          await limit.consume(key);
        } catch (refusal) {
          // The package rejects with a result where the count is used up, and with an Error else.
          if (!(refusal instanceof RateLimiterRes)) throw refusal;
          return Math.ceil(refusal.msBeforeNext / 1000);
        }
      }
      return null;
    },
    giveBack: async (remoteAddress, email) => {
      await pair.delete(`${remoteAddress} ${email}`);
      await address.reward(remoteAddress);
      await account.reward(email);
    },
  };
}
