import type { z } from "zod";
import { refusal } from "#app/domain/refusal.ts";

/** What the scripts of our own pages send is small; files never come this way. */
const MOST_JSON_BYTES = 1024 * 1024;

/**
 * The body of a request that a script of our own pages sent.
 *
 * @throws 400 or 413 as a response with a sentence
 */
export async function readJson<T>(request: Request, schema: z.ZodType<T>): Promise<T> {
  const length = Number(request.headers.get("Content-Length") ?? Number.NaN);
  if (!(length <= MOST_JSON_BYTES)) {
    throw refusal(413, "This request is too large, or does not say how large it is.");
  }
  let body: unknown;
  try {
    body = await request.json();
  } catch {
    throw refusal(400, "This request is not readable: load the page again.");
  }
  const read = schema.safeParse(body);
  if (read.success) return read.data;
  const [issue] = read.error.issues;
  const field = issue?.path.join(".") ?? "";
  throw refusal(400, `${field === "" ? "" : `${field}: `}${issue?.message ?? "Not as expected."}`);
}

/** Content-Disposition for a download under this name, also where it holds other than plain letters. */
export function attachment(fileName: string): string {
  const plain = fileName.replace(/[^\x20-\x7e]|["\\]/g, "_");
  const encoded = encodeURIComponent(fileName).replace(
    /['()*]/g,
    (character) => `%${character.charCodeAt(0).toString(16).toUpperCase()}`,
  );
  return `attachment; filename="${plain}"; filename*=UTF-8''${encoded}`;
}
