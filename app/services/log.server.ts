import { destination, pino } from "pino";

/** One JSON line for what is worth knowing later; never a secret, a query string or a form. */
export const log = pino({ base: null, serializers: { err: tellError } }, destination(2));

/**
 * An error with its causes as it stands in the log. A failed query repeats in its message the values
 * that were to be stored (addresses, hashes, whole results): those stay out.
 */
export function tellError(error: unknown): unknown {
  if (!(error instanceof Error)) return error;
  const isQuery = "query" in error && "params" in error;
  return {
    type: error.name,
    message: isQuery ? `Failed query: ${error.query}` : error.message,
    ...("code" in error ? { code: error.code } : {}),
    at: (error.stack ?? "")
      .split("\n")
      .filter((line) => /^ +at /.test(line))
      .map((line) => line.trim()),
    ...(error.cause === undefined ? {} : { cause: tellError(error.cause) }),
  };
}
