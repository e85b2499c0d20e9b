import { z } from "zod";

/** Compared and stored trimmed and in lower case. */
export const emailSchema = z
  .string()
  .trim()
  .toLowerCase()
  .max(254, "An e-mail address has at most 254 characters.")
  .pipe(z.email("This does not look like an e-mail address: it needs a name, an @ and a domain."));

export const SHORTEST_PASSWORD = 12;

/** For a new password; an existing one is only compared. */
export const newPasswordSchema = z
  .string()
  .min(SHORTEST_PASSWORD, `A password has at least ${SHORTEST_PASSWORD} characters.`)
  .max(200, "A password has at most 200 characters.");

export const personNameSchema = z
  .string()
  .trim()
  .min(1, "A name is missing.")
  .max(120, "A name has at most 120 characters.");
