import { type RouterContextProvider, redirect } from "react-router";
import { findMembership } from "#app/db/people.server.ts";
import { forbidden, refusal } from "#app/domain/refusal.ts";
import { ABILITIES, type Ability, type Actor, may } from "#app/domain/role.ts";
import { deskContext, gateContext, visitorContext } from "./context.server.ts";
import { findVisitor, type Visitor } from "./session.server.ts";

type Context = Readonly<RouterContextProvider>;

export interface Present {
  actor: Actor;
  person: { id: string; name: string; email: string };
  lab: { id: string; name: string };
}

/** Who asks, or null. Loaders of one request share one look at the session. */
export function findPerson(request: Request, context: Context): Promise<Visitor | null> {
  const known = context.get(visitorContext);
  if (known !== null) return known;
  const found = findVisitor(
    context.get(deskContext).store,
    context.get(gateContext).sessions,
    request,
  );
  context.set(visitorContext, found);
  return found;
}

/**
 * Who asks, whichever lab they work in.
 *
 * @throws a redirect to the sign-in page, or 401 for a script's request, where nobody is signed in
 */
export async function requirePerson(request: Request, context: Context): Promise<Visitor> {
  const visitor = await findPerson(request, context);
  if (visitor !== null) return visitor;
  throw goThrough("/sign-in", request, 401, "You are signed out: sign in and try again.");
}

/**
 * Who asks, in the lab that they work in now, and with which roles. Whether an object belongs to
 * that lab is for the caller to ask.
 *
 * @param ability  what they are about to do; left out: anything that a member may
 * @throws as `requirePerson`; a redirect to the choice of a lab where none is chosen; 403 where
 *   none of their roles may do it
 */
export async function requireActor(
  request: Request,
  context: Context,
  ability: Ability = "read",
): Promise<Present> {
  const { person, labId } = await requirePerson(request, context);
  const membership =
    labId === null
      ? null
      : await findMembership(context.get(deskContext).store.db, person.id, labId);
  if (membership === null) {
    throw goThrough("/choose-lab", request, 403, "Choose the lab that you work in first.");
  }
  const actor = { personId: person.id, labId: membership.lab.id, roles: membership.roles };
  if (!may(actor, ability)) {
    throw forbidden(
      `This is for the role ${ABILITIES[ability].join(" or ")} in ${membership.lab.name}; you hold ` +
        `${membership.roles.join(" and ")} there. The lab's manager can give you the role.`,
    );
  }
  return { actor, person, lab: membership.lab };
}

/** A page leads through another page and back; a script is told in a status what to do. */
function goThrough(page: string, request: Request, status: number, sentence: string): Response {
  const { pathname, search } = new URL(request.url);
  // The router asks for the data of a page at an address of its own ("/_root.data").
  const isPageData = pathname.endsWith(".data");
  const destination = request.headers.get("Sec-Fetch-Dest");
  const accept = request.headers.get("Accept") ?? "*/*";
  const isPage =
    isPageData ||
    (destination === null ? /\*\/\*|text\/html/.test(accept) : destination === "document");
  if (!isPage) return refusal(status, sentence);
  const query = new URLSearchParams(search);
  if (isPageData) query.delete("_routes");
  const path = isPageData ? pathname.replace(/(?:\/_root|\/_)?\.data$/, "") || "/" : pathname;
  const to = query.size > 0 ? `${path}?${query}` : path;
  return redirect(to === "/" ? page : `${page}?${new URLSearchParams({ to })}`);
}
