/** Colours for a canvas, read from the page's own values. */
export interface ChartColours {
  ink: string;
  quietInk: string;
  rule: string;
  hover: string;
  aside: string;
  model: string;
  figures: string;
}

export function readColours(element: Element): ChartColours {
  const style = getComputedStyle(element);
  const value = (name: string) => style.getPropertyValue(name).trim();
  return {
    ink: value("--ink"),
    quietInk: value("--ink-2"),
    rule: value("--rule"),
    hover: value("--hover"),
    aside: value("--aside"),
    model: value("--model"),
    figures: value("--figures"),
  };
}

/** Calls back when day turns to night, by the person's choice or the system's. @returns how to stop */
export function onThemeChange(changed: () => void): () => void {
  const chosen = new MutationObserver(changed);
  chosen.observe(document.documentElement, { attributes: true, attributeFilter: ["data-theme"] });
  const system = matchMedia("(prefers-color-scheme: dark)");
  system.addEventListener("change", changed);
  return () => {
    chosen.disconnect();
    system.removeEventListener("change", changed);
  };
}
