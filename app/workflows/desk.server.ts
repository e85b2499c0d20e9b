import type { Store } from "#app/db/client.server.ts";
import type { Clock } from "#app/services/clock.server.ts";
import type { Storage } from "#app/services/storage.server.ts";

/** What a workflow works with; a request's desk from the router's context fits as it is. */
export interface Desk {
  store: Store;
  storage: Storage;
  clock: Clock;
}
