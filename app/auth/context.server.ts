import { createContext } from "react-router";
import type { Store } from "#app/db/client.server.ts";
import type { Clock } from "#app/services/clock.server.ts";
import type { Storage } from "#app/services/storage.server.ts";

/** What a workflow works with. */
export interface Desk {
  store: Store;
  storage: Storage;
  clock: Clock;
}

/** Put into the router's context by `app/server.ts` for each request. */
export const deskContext = createContext<Desk>();
