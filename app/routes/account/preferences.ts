import { data, redirect } from "react-router";
import { z } from "zod";
import { ownPath } from "#app/auth/own-path.ts";
import { notFound } from "#app/domain/refusal.ts";
import { THEMES, themeCookie } from "#app/domain/theme.ts";
import type { Route } from "./+types/preferences.ts";

const form = z.object({ theme: z.enum(THEMES), back: z.string().optional() });

export function loader() {
  throw notFound();
}

/** How the screen looks is a matter of the device: kept in a cookie, for whoever sits there. */
export async function action({ request }: Route.ActionArgs) {
  const parsed = form.safeParse(Object.fromEntries(await request.formData()));
  if (!parsed.success) {
    return data({ error: "Choose day, night or as the system says." }, { status: 400 });
  }
  const { theme, back } = parsed.data;
  const headers = { "Set-Cookie": themeCookie(theme) };
  return back === undefined ? data({ theme }, { headers }) : redirect(ownPath(back), { headers });
}
