import type { ReactNode } from "react";
import { Links, Meta, Outlet, Scripts, ScrollRestoration, useRouteLoaderData } from "react-router";
import { readTheme } from "#app/domain/theme.ts";
import type { Route } from "./+types/root.ts";
import stylesheet from "./app.css?url";
import { ErrorScreen } from "./components/error-screen.tsx";
import { PlainPage } from "./components/plain-page.tsx";

export function links(): Route.LinkDescriptors {
  return [
    { rel: "stylesheet", href: stylesheet },
    { rel: "icon", href: "/favicon.svg", type: "image/svg+xml" },
    { rel: "alternate icon", href: "/favicon.ico", sizes: "16x16 32x32 48x48" },
  ];
}

export function meta(): Route.MetaDescriptors {
  return [
    { title: "Ogee" },
    { name: "description", content: "Joint impedance from perturbation recordings." },
  ];
}

export function loader({ request }: Route.LoaderArgs) {
  return { theme: readTheme(request.headers.get("cookie")) };
}

/** Round every page, also the one that says what went wrong. The theme is there in the first byte. */
export function Layout({ children }: { children: ReactNode }) {
  const root = useRouteLoaderData<typeof loader>("root");
  const theme = root?.theme ?? "system";
  return (
    <html data-theme={theme === "system" ? undefined : theme} lang="en">
      <head>
        <meta charSet="utf-8" />
        <meta content="width=device-width, initial-scale=1" name="viewport" />
        <meta content="light dark" name="color-scheme" />
        <Meta />
        <Links />
      </head>
      <body>
        <a
          className="sr-only z-10 rounded border-edge bg-sheet focus:not-sr-only focus:border focus:fixed focus:top-2 focus:left-2 focus:px-3 focus:py-2"
          href="#main"
        >
          Skip to the content
        </a>
        {children}
        <ScrollRestoration />
        <Scripts />
      </body>
    </html>
  );
}

export default function Root() {
  return <Outlet />;
}

export function ErrorBoundary() {
  return (
    <PlainPage>
      <ErrorScreen />
    </PlainPage>
  );
}
