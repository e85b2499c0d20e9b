/** The axis that is shown: a word where there is one, a choice where there are two. */
export function AxisSwitch({
  axes,
  axis,
  onAxis,
}: {
  axes: readonly { name: string; label: string }[];
  axis: string;
  onAxis: (name: string) => void;
}) {
  if (axes.length < 2) return <span>{axes[0]?.label}</span>;
  return (
    <fieldset className="flex">
      <legend className="sr-only">Axis</legend>
      {axes.map(({ name, label }, i) => (
        <label
          className="inline-flex min-h-6 items-center border border-edge px-2 first-of-type:rounded-l last-of-type:rounded-r last-of-type:border-l-0 has-checked:bg-ink has-checked:text-paper has-focus-visible:outline-2 has-focus-visible:outline-offset-2 has-focus-visible:outline-focus"
          key={name}
          title={`Key ${i + 1}`}
        >
          <input
            checked={name === axis}
            className="sr-only"
            name="axis"
            onChange={() => onAxis(name)}
            type="radio"
            value={name}
          />
          {label}
        </label>
      ))}
    </fieldset>
  );
}
