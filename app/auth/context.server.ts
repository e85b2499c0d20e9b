import { createContext } from "react-router";
import type { Desk } from "./desk.server.ts";
import type { Gate } from "./gate.server.ts";
import type { Visitor } from "./session.server.ts";

/** Put into the router's context by `app/server.ts` for each request. */
export const deskContext = createContext<Desk>();

/** Who may come in, and how; put there beside the desk. */
export const gateContext = createContext<Gate>();

/** The network address that a request came from, for limits on trying passwords. */
export const remoteAddressContext = createContext<string>("unknown");

/** Marks the scripts of this answer that the content security policy lets run. */
export const nonceContext = createContext<string | undefined>(undefined);

/** Whether this answer may go out compressed: the caller takes gzip. */
export const gzipContext = createContext<boolean>(false);

/** Who asks, once a loader or action of this request has looked; `require.server.ts` fills it. */
export const visitorContext = createContext<Promise<Visitor | null> | null>(null);
