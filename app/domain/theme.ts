/** How the screen looks: as the system says, or as the person told us. Kept in a cookie, by device. */
export const THEMES = ["system", "day", "night"] as const;
export type Theme = (typeof THEMES)[number];

export const THEME_COOKIE = "theme";
const ONE_YEAR_S = 365 * 24 * 3600;

/** From a `Cookie` header; anything unknown is the system's setting. */
export function readTheme(cookieHeader: string | null): Theme {
  const value = cookieHeader
    ?.split(";")
    .map((pair) => pair.trim())
    .find((pair) => pair.startsWith(`${THEME_COOKIE}=`))
    ?.slice(THEME_COOKIE.length + 1);
  return THEMES.find((theme) => theme === value) ?? "system";
}

/** For a `Set-Cookie` header; "system" removes the cookie. Holds nothing secret. */
export function themeCookie(theme: Theme): string {
  const age = theme === "system" ? 0 : ONE_YEAR_S;
  return `${THEME_COOKIE}=${theme}; Path=/; Max-Age=${age}; SameSite=Lax`;
}
