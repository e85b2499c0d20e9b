/** Codes of what can be wrong with a file or, once the file is read, with a protocol for it. */
export type EngineErrorCode =
  | "unreadable" // the recording cannot be read as the protocol asks: exit 3 of the headless command
  | "protocol"; // the protocol asks for what this recording cannot give: exit 2

/**
 * What a file can do wrong. The code stands in `name`, since name, message and stack are all that
 * survives the way from a worker to the page.
 */
export class EngineError extends Error {
  /** Physical line of the file, from 1, where one line is to blame. */
  readonly line: number | null;
  /** Dotted protocol field, where a field is to blame. */
  readonly field: string | null;

  constructor(code: EngineErrorCode, message: string, at: { line?: number; field?: string } = {}) {
    super(message);
    this.name = code;
    this.line = at.line ?? null;
    this.field = at.field ?? null;
  }
}

/**
 * Every flag: one code, one plain sentence, one thing to do. The headless command, the screens and
 * the method pages all read this table.
 */
export const FLAGS = {
  low_vaf: {
    text: "The model explains less than 90 % of the torque's variance in this window.",
    todo: "Look at the residual: a wrong trim, a reflex or slip between rig and limb is likely.",
  },
} as const satisfies Record<string, { text: string; todo: string }>;

export type FlagCode = keyof typeof FLAGS;

/** The flag as it stands in a result. */
export function flag(code: FlagCode): { code: string; text: string } {
  return { code, text: FLAGS[code].text };
}
