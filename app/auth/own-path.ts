/**
 * The address to go on to after signing in, if it is one of our own; else `fallback`. What arrives
 * here stands in a link that anyone can make.
 *
 * @param to  as it stands in the query or the form
 */
export function ownPath(to: string | null | undefined, fallback = "/"): string {
  if (!to?.startsWith("/")) return fallback;
  const here = "http://here.invalid";
  let url: URL;
  try {
    url = new URL(to, here);
  } catch {
    return fallback;
  }
  // "//other", "/\other" and tabs between them name another host; "/.//other" becomes "//other".
  if (url.origin !== here || url.pathname.startsWith("//")) return fallback;
  return url.pathname + url.search + url.hash;
}
