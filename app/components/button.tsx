import type { ButtonHTMLAttributes, ReactNode } from "react";
import { Link, type LinkProps } from "react-router";

/** `do` is the one thing that the screen is for; `plain` everything else; `quiet` stands inside a row. */
export type ButtonLook = "do" | "plain" | "quiet";

const BASE =
  "inline-flex items-center justify-center gap-1.5 rounded border px-2.5 py-1 text-base min-h-[30px] " +
  "whitespace-nowrap no-underline select-none disabled:opacity-60 aria-busy:opacity-60";

const LOOKS: Record<ButtonLook, string> = {
  do: "bg-ink text-paper border-ink enabled:hover:bg-ink/90 [a&]:hover:bg-ink/90",
  plain: "bg-sheet text-ink border-edge enabled:hover:bg-hover [a&]:hover:bg-hover",
  quiet:
    "bg-transparent text-ink border-transparent px-1.5 min-h-6 enabled:hover:bg-hover [a&]:hover:bg-hover",
};

export interface ButtonProps extends ButtonHTMLAttributes<HTMLButtonElement> {
  look?: ButtonLook;
  /** The key that does the same ("Z"). */
  keyHint?: string;
  /** Something is under way: the button stays where it is and says so. */
  busy?: boolean;
  /** What the button says meanwhile ("Saving"). */
  busyLabel?: string;
  children: ReactNode;
}

export function Button({
  look = "plain",
  keyHint,
  busy = false,
  busyLabel,
  className = "",
  children,
  type = "submit",
  disabled,
  ...rest
}: ButtonProps) {
  return (
    <button
      {...rest}
      aria-busy={busy || undefined}
      aria-keyshortcuts={keyHint}
      className={`${BASE} ${LOOKS[look]} ${className}`}
      disabled={disabled || busy}
      type={type}
    >
      {busy && busyLabel ? busyLabel : children}
      {keyHint ? <Key>{keyHint}</Key> : null}
    </button>
  );
}

export function ButtonLink({
  look = "plain",
  keyHint,
  className = "",
  children,
  ...rest
}: Omit<LinkProps, "className"> & { look?: ButtonLook; keyHint?: string; className?: string }) {
  return (
    <Link {...rest} aria-keyshortcuts={keyHint} className={`${BASE} ${LOOKS[look]} ${className}`}>
      {children}
      {keyHint ? <Key>{keyHint}</Key> : null}
    </Link>
  );
}

/** A key of the keyboard; a hint beside a button is not read out, `aria-keyshortcuts` says it. */
export function Key({ children, spoken = false }: { children: ReactNode; spoken?: boolean }) {
  return (
    <kbd
      aria-hidden={spoken ? undefined : true}
      className="rounded-sm border border-current/50 px-1 font-mono text-sm opacity-80"
    >
      {children}
    </kbd>
  );
}
