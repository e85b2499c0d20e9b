import { useState } from "react";

const MOST_ROWS = 3000;

/** A plot's numbers behind a line: for screen readers and for copying. */
export function PlotTable({
  of: what,
  heads,
  rows,
}: {
  /** What is shown ("Residual over time"). */
  of: string;
  heads: readonly string[];
  /** Made only when asked for. */
  rows: () => readonly (readonly string[])[];
}) {
  const [open, setOpen] = useState(false);
  return (
    <details onToggle={(event) => setOpen(event.currentTarget.open)}>
      <summary className="min-h-6 text-sm text-ink-2">Show as table</summary>
      {open ? (
        // biome-ignore lint/a11y/noNoninteractiveTabindex: what scrolls by itself is reached by the keyboard.
        <div className="wide max-h-72 overflow-y-auto border border-rule" tabIndex={0}>
          <table className="rows">
            <caption className="sr-only">{what}</caption>
            <thead>
              <tr>
                {heads.map((head) => (
                  <th className="r px-2" key={head} scope="col">
                    {head}
                  </th>
                ))}
              </tr>
            </thead>
            <tbody>
              {rows()
                .slice(0, MOST_ROWS)
                .map((row) => (
                  <tr key={row.join(" ")}>
                    {row.map((cell, i) => (
                      <td className="r num px-2" key={heads[i]}>
                        {cell}
                      </td>
                    ))}
                  </tr>
                ))}
            </tbody>
          </table>
        </div>
      ) : null}
    </details>
  );
}
