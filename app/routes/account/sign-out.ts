import { redirect } from "react-router";
import { gateContext } from "#app/auth/context.server.ts";
import type { Route } from "./+types/sign-out.ts";

/** An address typed by hand changes nothing. */
export function loader() {
  return redirect("/");
}

/** Ends the session in the database too, so that a copy of the cookie opens nothing. */
export async function action({ request, context }: Route.ActionArgs) {
  const { sessions } = context.get(gateContext);
  const session = await sessions.getSession(request.headers.get("Cookie"));
  return redirect("/sign-in", {
    headers: { "Set-Cookie": await sessions.destroySession(session) },
  });
}
