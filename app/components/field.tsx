import {
  type InputHTMLAttributes,
  type ReactNode,
  type SelectHTMLAttributes,
  type TextareaHTMLAttributes,
  useId,
} from "react";

interface FieldFrame {
  label: ReactNode;
  /** What is asked for, in a sentence, below the field. */
  hint?: ReactNode;
  /** What is wrong and what to do; stands beside the field and is read with it. */
  error?: string | string[] | null;
  /**
   * The label is read out but not drawn, where a column's head or the row above says it already;
   * "wide": drawn on a narrow screen only, where rows fall apart.
   */
  labelHidden?: boolean | "wide";
  /** Behind the field ("kg"). */
  unit?: string;
}

function firstError(error: FieldFrame["error"]): string | null {
  const text = Array.isArray(error) ? error[0] : error;
  return text ? text : null;
}

function useField(frame: FieldFrame, givenId: string | undefined) {
  const made = useId();
  const id = givenId ?? made;
  const error = firstError(frame.error);
  const describedBy =
    [frame.hint ? `${id}-hint` : null, error ? `${id}-error` : null].filter(Boolean).join(" ") ||
    undefined;
  return { id, error, describedBy };
}

function Frame({
  id,
  frame,
  error,
  children,
}: {
  id: string;
  frame: FieldFrame;
  error: string | null;
  children: ReactNode;
}) {
  return (
    <div className="min-w-0">
      <label className={labelClass(frame.labelHidden)} htmlFor={id}>
        {frame.label}
      </label>
      {frame.unit ? (
        <div className="flex items-center gap-2">
          {children}
          <span className="num text-ink-2">{frame.unit}</span>
        </div>
      ) : (
        children
      )}
      {frame.hint ? (
        <p className="mt-1 text-sm text-ink-2" id={`${id}-hint`}>
          {frame.hint}
        </p>
      ) : null}
      <FieldError error={error} id={`${id}-error`} />
    </div>
  );
}

function labelClass(hidden: FieldFrame["labelHidden"]): string {
  if (hidden === "wide") return "mb-1 block md:sr-only";
  return hidden ? "sr-only" : "mb-1 block";
}

/** The sentence below a field that is not right. */
export function FieldError({ id, error }: { id?: string; error: FieldFrame["error"] }) {
  const text = firstError(error);
  return text ? (
    <p className="mt-1 border-l-2 border-ink pl-2 text-sm" id={id}>
      {text}
    </p>
  ) : null;
}

export type TextFieldProps = FieldFrame & InputHTMLAttributes<HTMLInputElement>;

/** Label, input, hint, error. Numbers are `type="text" inputMode="decimal"`, so that a comma is no loss. */
export function TextField({
  label,
  hint,
  error: given,
  labelHidden,
  unit,
  className = "",
  id: givenId,
  ...rest
}: TextFieldProps) {
  const frame = { label, hint, error: given, labelHidden, unit };
  const { id, error, describedBy } = useField(frame, givenId);
  return (
    <Frame error={error} frame={frame} id={id}>
      <input
        {...rest}
        aria-describedby={describedBy}
        aria-invalid={error ? true : undefined}
        className={`control ${className}`}
        id={id}
      />
    </Frame>
  );
}

export type SelectFieldProps = FieldFrame &
  SelectHTMLAttributes<HTMLSelectElement> & {
    options: readonly { value: string; label: string }[];
    /** First line without a value ("Choose a rig"). */
    placeholder?: string;
  };

export function SelectField({
  label,
  hint,
  error: given,
  labelHidden,
  unit,
  className = "",
  id: givenId,
  options,
  placeholder,
  ...rest
}: SelectFieldProps) {
  const frame = { label, hint, error: given, labelHidden, unit };
  const { id, error, describedBy } = useField(frame, givenId);
  return (
    <Frame error={error} frame={frame} id={id}>
      <select
        {...rest}
        aria-describedby={describedBy}
        aria-invalid={error ? true : undefined}
        className={`control pr-6 ${className}`}
        id={id}
      >
        {placeholder !== undefined ? <option value="">{placeholder}</option> : null}
        {options.map((option) => (
          <option key={option.value} value={option.value}>
            {option.label}
          </option>
        ))}
      </select>
    </Frame>
  );
}

export type TextAreaFieldProps = FieldFrame & TextareaHTMLAttributes<HTMLTextAreaElement>;

export function TextAreaField({
  label,
  hint,
  error: given,
  labelHidden,
  className = "",
  id: givenId,
  rows = 3,
  ...rest
}: TextAreaFieldProps) {
  const frame = { label, hint, error: given, labelHidden };
  const { id, error, describedBy } = useField(frame, givenId);
  return (
    <Frame error={error} frame={frame} id={id}>
      <textarea
        {...rest}
        aria-describedby={describedBy}
        aria-invalid={error ? true : undefined}
        className={`control ${className}`}
        id={id}
        rows={rows}
      />
    </Frame>
  );
}

export type CheckFieldProps = Omit<FieldFrame, "unit" | "labelHidden"> &
  Omit<InputHTMLAttributes<HTMLInputElement>, "type"> & { type?: "checkbox" | "radio" };

/** A tick or one choice of several, its label behind it; the whole line is the target. */
export function CheckField({
  label,
  hint,
  error: given,
  className = "",
  id: givenId,
  type = "checkbox",
  ...rest
}: CheckFieldProps) {
  const { id, error, describedBy } = useField({ label, hint, error: given }, givenId);
  return (
    <div className={className}>
      <label className="flex min-h-6 items-center gap-2" htmlFor={id}>
        <input
          {...rest}
          aria-describedby={describedBy}
          aria-invalid={error ? true : undefined}
          className="size-4 shrink-0"
          id={id}
          type={type}
        />
        <span>{label}</span>
      </label>
      {hint ? (
        <p className="ml-6 text-sm text-ink-2" id={`${id}-hint`}>
          {hint}
        </p>
      ) : null}
      <FieldError error={error} id={`${id}-error`} />
    </div>
  );
}
