import type { TablePreview } from "#app/engine/types.ts";

/** Of a table with very many columns the first are shown; all can be mapped. */
const MOST_COLUMNS = 60;
const ROWS = 4;

/** The first rows as they stand in the file, and above each column what it is mapped to. */
export function PreviewTable({
  fileName,
  preview,
  roles,
}: {
  fileName: string;
  preview: TablePreview;
  roles: ReadonlyMap<string, string>;
}) {
  const columns = preview.header.slice(0, MOST_COLUMNS).map((name, index) => ({
    // A name may stand twice; its place does not.
    key: `${index} ${name}`,
    index,
    name,
    unit: preview.units[index] ?? "",
    role: roles.get(name) ?? null,
  }));
  const more = preview.header.length - columns.length;
  return (
    <>
      {/* biome-ignore lint/a11y/noNoninteractiveTabindex: what scrolls must be reachable by keyboard. */}
      <section aria-label={`First rows of ${fileName}`} className="wide" tabIndex={0}>
        <table className="rows [&_:is(td,th)]:py-px [&_thead_tr:first-child_th]:border-b-0">
          <thead>
            <tr>
              {columns.map(({ key, role }) => (
                <th className="r" key={key} scope="col">
                  {role ? <strong className="text-ink">{role}</strong> : "–"}
                </th>
              ))}
            </tr>
            <tr>
              {columns.map(({ key, name, unit, role }) => (
                <th className="r" key={key} scope="col">
                  <span className={`num block ${role ? "text-ink" : ""}`}>{name || "no name"}</span>
                  <span className="font-mono">{unit || "–"}</span>
                </th>
              ))}
            </tr>
          </thead>
          <tbody>
            {preview.rows.slice(0, ROWS).map((row, line) => (
              // biome-ignore lint/suspicious/noArrayIndexKey: rows of a file have no name but their place.
              <tr key={line}>
                {columns.map(({ key, index, role }) => (
                  <td className={`r num ${role ? "" : "text-ink-2"}`} key={key}>
                    {row[index]}
                  </td>
                ))}
              </tr>
            ))}
          </tbody>
        </table>
      </section>
      {more > 0 ? <p className="text-sm text-ink-2">and {more} more columns</p> : null}
    </>
  );
}
