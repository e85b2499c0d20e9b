import { createHash } from "node:crypto";
import type { Storage } from "#app/services/storage.server.ts";

/**
 * Reads a stored file once: its bytes and the SHA-256 of what was read.
 *
 * @throws where the storage broke off: what was read then says nothing of what is stored
 */
export async function readHashed(
  storage: Storage,
  file: { storageKey: string; sizeBytes: number },
): Promise<{ bytes: Uint8Array<ArrayBuffer>; sha256: string }> {
  const bytes = new Uint8Array(file.sizeBytes);
  const hash = createHash("sha256");
  let offset = 0;
  const { body, sizeBytes } = await storage.stream(file.storageKey);
  for await (const chunk of body) {
    hash.update(chunk);
    // What is longer than it should be is told by its hash.
    if (offset + chunk.length <= bytes.length) bytes.set(chunk, offset);
    offset += chunk.length;
  }
  if (offset !== sizeBytes) {
    throw new Error(`The storage sent ${offset} of ${sizeBytes} bytes of ${file.storageKey}.`);
  }
  return { bytes, sha256: hash.digest("hex") };
}
