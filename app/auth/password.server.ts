import { hash, verify } from "@node-rs/argon2";

/**
 * argon2id, 19 MiB, two passes, one lane (OWASP Password Storage Cheat Sheet, 2024); written out, so
 * that another default of the package changes nothing here. argon2id is the package's default.
 */
const COST = { memoryCost: 19_456, timeCost: 2, parallelism: 1 };

/** @returns a PHC string */
export function hashPassword(password: string): Promise<string> {
  return hash(password, COST);
}

export async function verifyPassword(passwordHash: string, password: string): Promise<boolean> {
  try {
    return await verify(passwordHash, password);
  } catch {
    // Not a PHC string: an account that no password opens.
    return false;
  }
}
