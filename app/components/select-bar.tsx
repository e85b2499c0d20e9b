import type { ReactNode } from "react";
import { Form, useSubmit } from "react-router";
import { Button } from "./button.tsx";

/**
 * Choices that stand in the address: changing one loads the page with it. Without scripts the
 * button does.
 */
export function SelectBar({ label, children }: { label: string; children: ReactNode }) {
  const submit = useSubmit();
  return (
    <Form
      aria-label={label}
      className="mb-4 flex flex-wrap items-end gap-x-4 gap-y-2"
      onChange={(event) => submit(event.currentTarget, { replace: true, preventScrollReset: true })}
      role="search"
    >
      {children}
      <noscript>
        <Button>Show</Button>
      </noscript>
    </Form>
  );
}

/** One choice of a `SelectBar`. */
export function BarSelect({
  label,
  name,
  value,
  options,
}: {
  label: string;
  name: string;
  value: string;
  options: readonly { value: string; label: string }[];
}) {
  return (
    <label className="block text-sm text-ink-2">
      {label}
      <select
        className="control mt-0.5 pr-6 text-base text-ink"
        defaultValue={value}
        key={value}
        name={name}
      >
        {options.map((option) => (
          <option key={option.value} value={option.value}>
            {option.label}
          </option>
        ))}
      </select>
    </label>
  );
}
