import { SelectField, TextField } from "#app/components/field.tsx";
import type { Dialect, TableProtocol } from "#app/engine/types.ts";

const SEPARATORS = [
  { value: "auto", label: "found" },
  { value: ",", label: "comma" },
  { value: ";", label: "semicolon" },
  { value: "\t", label: "tab" },
  { value: "|", label: "bar" },
  { value: " ", label: "spaces" },
];
const DECIMALS = [
  { value: "auto", label: "found" },
  { value: ".", label: "point" },
  { value: ",", label: "comma" },
];

/** "semicolons, decimal comma, names in line 5": how the text is laid out. */
export function layoutInWords(dialect: Dialect): string {
  const separator = SEPARATORS.find(({ value }) => value === dialect.separator)?.label ?? "";
  const decimal = dialect.decimal === "," ? "decimal comma" : "decimal point";
  const units = dialect.unitsLine === null ? "" : `, units in line ${dialect.unitsLine}`;
  const encoding = dialect.encoding === "utf-8" ? "" : `, ${dialect.encoding.toUpperCase()}`;
  return `separated by ${separator}${separator === "tab" || separator === "comma" || separator === "semicolon" || separator === "bar" ? "s" : ""}, ${decimal}, names in line ${dialect.headerLine}${units}${encoding}`;
}

/** For a file whose layout is not found, or found wrongly. */
export function LayoutFields({
  table,
  onChange,
}: {
  table: TableProtocol;
  onChange: (table: TableProtocol) => void;
}) {
  return (
    <div className="grid grid-cols-3 items-start gap-2">
      <SelectField
        label="Separator"
        onChange={(event) => {
          const separator = event.currentTarget.value as TableProtocol["separator"];
          onChange({ ...table, separator });
        }}
        options={SEPARATORS}
        value={table.separator}
      />
      <SelectField
        label="Decimal mark"
        onChange={(event) => {
          const decimal = event.currentTarget.value as TableProtocol["decimal"];
          onChange({ ...table, decimal });
        }}
        options={DECIMALS}
        value={table.decimal}
      />
      <TextField
        className="text-right font-mono text-figure"
        inputMode="numeric"
        label="Line of names"
        onChange={(event) => {
          const line = Number(event.currentTarget.value);
          onChange({ ...table, header_row: Number.isInteger(line) && line > 0 ? line : "auto" });
        }}
        placeholder="found"
        value={table.header_row === "auto" ? "" : String(table.header_row)}
      />
    </div>
  );
}
