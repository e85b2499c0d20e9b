import { createContext } from "react-router";
import type { Store } from "#app/db/client.server.ts";
import type { Clock } from "#app/services/clock.server.ts";
import type { Storage } from "#app/services/storage.server.ts";
import type { Gate } from "./gate.server.ts";
import type { Visitor } from "./session.server.ts";

/** What a workflow works with. */
export interface Desk {
  store: Store;
  storage: Storage;
  clock: Clock;
}

/** Put into the router's context by `app/server.ts` for each request. */
export const deskContext = createContext<Desk>();

/** Who may come in, and how; put there beside the desk. */
export const gateContext = createContext<Gate>();

/** The network address that a request came from, for limits on trying passwords. */
export const remoteAddressContext = createContext<string>("unknown");

/** Who asks, once a loader or action of this request has looked; `require.server.ts` fills it. */
export const visitorContext = createContext<Promise<Visitor | null> | null>(null);
