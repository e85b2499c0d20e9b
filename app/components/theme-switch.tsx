import { Form, useFetcher } from "react-router";
import { THEMES, type Theme } from "#app/domain/theme.ts";

const WORDS: Record<Theme, string> = { system: "System", day: "Day", night: "Night" };

/** How the screen looks on this device. Works as a plain form; with scripts the page stays as it is. */
export function ThemeSwitch({ theme, back }: { theme: Theme; back: string }) {
  const fetcher = useFetcher();
  const asked = fetcher.formData?.get("theme");
  const shown = THEMES.find((word) => word === asked) ?? theme;
  return (
    <Form
      action="/preferences"
      aria-label="How the screen looks"
      className="flex gap-2"
      method="post"
      onSubmit={(event) => {
        const { submitter } = event.nativeEvent as SubmitEvent;
        if (!(submitter instanceof HTMLButtonElement)) return;
        event.preventDefault();
        // Without an address to go back to there is no navigation, and nothing unsaved is asked about.
        fetcher.submit({ theme: submitter.value }, { method: "post", action: "/preferences" });
      }}
    >
      <input name="back" type="hidden" value={back} />
      {THEMES.map((word) => (
        <button
          aria-pressed={word === shown}
          className="min-h-6 min-w-6 text-sm text-ink-2 hover:text-ink aria-pressed:font-semibold aria-pressed:text-ink"
          key={word}
          name="theme"
          type="submit"
          value={word}
        >
          {WORDS[word]}
        </button>
      ))}
    </Form>
  );
}
