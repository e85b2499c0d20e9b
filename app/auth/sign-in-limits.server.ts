import { isIPv6 } from "node:net";
import { RateLimiterMemory, RateLimiterRes } from "rate-limiter-flexible";

const MINUTE_S = 60;
const TRIES_OF_ADDRESS = 60;

/** Tries that fail; one that succeeds is given back. */
export interface SignInLimits {
  /** Counts a try before it is made. @returns how long to wait, s, or null where it may be made */
  count(remoteAddress: string, email: string): Promise<number | null>;
  /** The try succeeded. */
  giveBack(remoteAddress: string, email: string): Promise<void>;
}

/**
 * Three counts at once: one network address trying one account (guessing), many trying one account
 * (a spread guess), one trying many accounts (one password everywhere). Kept in memory: a restart
 * forgets them.
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
    points: TRIES_OF_ADDRESS,
    duration: 15 * MINUTE_S,
  });
  return {
    count: async (remoteAddress, email) => {
      const network = networkOf(remoteAddress);
      // An address that is shut out leaves no trace for each account that it names.
      const tries = await address.get(network);
      if (tries !== null && tries.consumedPoints >= TRIES_OF_ADDRESS) return waitOf(tries);
      // One after the other: a try that the first count refuses does not use up the others.
      for (const [limit, key] of [
        [pair, `${network} ${email}`],
        [address, network],
        [account, email],
      ] as const) {
        try {
          await limit.consume(key);
        } catch (refusal) {
          // The package rejects with a result where the count is used up, and with an Error else.
          if (!(refusal instanceof RateLimiterRes)) throw refusal;
          return waitOf(refusal);
        }
      }
      return null;
    },
    giveBack: async (remoteAddress, email) => {
      const network = networkOf(remoteAddress);
      await pair.delete(`${network} ${email}`);
      await address.reward(network);
      await account.reward(email);
    },
  };
}

function waitOf(count: RateLimiterRes): number {
  return Math.ceil(count.msBeforeNext / 1000);
}

/**
 * Whom an address belongs to: of IPv6 the first 64 bits, since a connection has all the addresses
 * below them (RFC 6177); of IPv4 the whole.
 */
export function networkOf(remoteAddress: string): string {
  const [address = ""] = remoteAddress.split("%");
  if (!isIPv6(address)) return remoteAddress;
  const mapped = /^::ffff:([\d.]+)$/i.exec(address);
  if (mapped?.[1]) return mapped[1];
  const [before = "", after] = address.toLowerCase().split("::");
  const left = before === "" ? [] : before.split(":");
  const right = after === undefined || after === "" ? [] : after.split(":");
  // An IPv4 tail stands for two groups.
  const tail = right.at(-1)?.includes(".") ? 1 : 0;
  const zeros = after === undefined ? 0 : 8 - left.length - right.length - tail;
  const groups = [...left, ...Array.from({ length: zeros }, () => "0"), ...right];
  return `${groups
    .slice(0, 4)
    .map((group) => group.replace(/^0+(?=.)/, ""))
    .join(":")}::/64`;
}
