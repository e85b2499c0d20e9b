import { isRouteErrorResponse, useRouteError } from "react-router";
import { ButtonLink } from "./button.tsx";
import { Mark } from "./mark.tsx";

interface ErrorWords {
  title: string;
  text: string;
}

/** What happened, to what, and what to do; a sentence that the server gave wins for 4xx. */
export function wordsOfError(error: unknown): ErrorWords {
  if (!isRouteErrorResponse(error)) {
    return {
      title: "This page could not be shown",
      text: "Something went wrong on our side; nothing that you saved is lost. Load the page again. If it happens again, tell whoever runs Ogee in your lab what you did.",
    };
  }
  // The router's own 404 speaks of routes.
  const said =
    typeof error.data === "string" && error.data.length > 0 && !error.data.startsWith("Error:")
      ? error.data
      : null;
  switch (error.status) {
    case 400:
      return {
        title: "That could not be read",
        text: said ?? "What was sent is not complete. Go back and try again.",
      };
    case 403:
      return {
        title: "Not among your roles here",
        text:
          said ??
          "Your roles in this lab do not include this. A lab manager can change your roles.",
      };
    case 404:
      return {
        title: "Nothing stands here",
        text: `${said ?? "There is nothing at this address, or it belongs to another lab."} Check the address, or begin at your own page.`,
      };
    case 409:
      return {
        title: "Somebody was faster",
        text: said ?? "This was changed meanwhile. Load the page again to see how it stands now.",
      };
    case 429:
      return {
        title: "Too many tries",
        text: said ?? "Wait some minutes and try again.",
      };
    default:
      return {
        title: "This page could not be shown",
        text: "Something went wrong on our side; nothing that you saved is lost. Load the page again.",
      };
  }
}

/** A finished page for what went wrong; every route's `ErrorBoundary` shows it in its own place. */
export function ErrorScreen() {
  const { title, text } = wordsOfError(useRouteError());
  return (
    <div className="flex max-w-prose flex-col items-start gap-4 py-2">
      <title>{`${title} · Ogee`}</title>
      <span className="text-aside">
        <Mark size="sketch" />
      </span>
      <h1>{title}</h1>
      <p>{text}</p>
      <ButtonLink reloadDocument to="/">
        Go to your page
      </ButtonLink>
    </div>
  );
}
