import { destination, pino } from "pino";

/** One JSON line for what is worth knowing later; never a secret, a query string or a form. */
export const log = pino({ base: null }, destination(2));
