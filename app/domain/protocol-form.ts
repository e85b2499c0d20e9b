import type { FieldProblem } from "./field-problem.ts";
import { type ProtocolChoices, readProtocolChoices } from "./protocol.ts";

/**
 * The study's choices as fields of a form: each field is called as the choice is in the protocol
 * ("filter.cutoff_hz", "window_ms.1"), so that a problem finds its field. Values are as typed.
 */
export type ProtocolFields = Readonly<Record<string, string>>;

const NUMBER_FIELDS = [
  "filter.order",
  "filter.cutoff_hz",
  "derivative.savitzky_golay.polynomial",
  "derivative.savitzky_golay.span_ms",
  "onset.cutoff_hz",
  "onset.min_separation_ms",
  "onset.expected_amplitude_deg",
  "onset.expected_duration_ms",
  "reflex_limit_ms",
  "background.target",
  "background.tolerance",
  "baseline_ms.0",
  "baseline_ms.1",
  "window_ms.0",
  "window_ms.1",
  "model.fixed.K",
  "model.fixed.B",
  "model.fixed.I",
  "lag_ms",
  "max_filled_samples",
] as const;
type NumberField = (typeof NUMBER_FIELDS)[number];

/** A choice as the form shows it. */
export function fieldsOfChoices(choices: ProtocolChoices): ProtocolFields {
  const { filter, derivative, onset, background, model, robustness } = choices;
  const smoothing = derivative === "central" ? null : derivative.savitzky_golay;
  const numbers: Record<NumberField, number | null | undefined> = {
    "filter.order": filter?.order,
    "filter.cutoff_hz": filter?.cutoff_hz,
    "derivative.savitzky_golay.polynomial": smoothing?.polynomial,
    "derivative.savitzky_golay.span_ms": smoothing?.span_ms,
    "onset.cutoff_hz": onset.cutoff_hz,
    "onset.min_separation_ms": onset.min_separation_ms,
    "onset.expected_amplitude_deg": onset.expected_amplitude_deg,
    "onset.expected_duration_ms": onset.expected_duration_ms,
    reflex_limit_ms: choices.reflex_limit_ms,
    "background.target": background.target,
    "background.tolerance": background.tolerance,
    "baseline_ms.0": choices.baseline_ms[0],
    "baseline_ms.1": choices.baseline_ms[1],
    "window_ms.0": choices.window_ms[0],
    "window_ms.1": choices.window_ms[1],
    "model.fixed.K": model.fixed.K,
    "model.fixed.B": model.fixed.B,
    "model.fixed.I": model.fixed.I,
    lag_ms: choices.lag_ms,
    max_filled_samples: choices.max_filled_samples,
  };
  return {
    ...Object.fromEntries(
      NUMBER_FIELDS.map((field) => [field, String(numbers[field] ?? "").replace("-", "−")]),
    ),
    filter: filter === null ? "none" : "butterworth",
    derivative: smoothing === null ? "central" : "savitzky_golay",
    "onset.from": onset.from,
    "model.terms.K": model.terms.includes("K") ? "on" : "",
    "model.terms.B": model.terms.includes("B") ? "on" : "",
    "model.terms.I": model.terms.includes("I") ? "on" : "",
    "model.nonnegative": model.nonnegative ? "on" : "",
    "robustness.window_end_ms": robustness?.window_end_ms.join(", ") ?? "",
    "robustness.cutoff_hz": robustness?.cutoff_hz.join(", ") ?? "",
  };
}

/** Reads what was typed; a comma is a decimal mark, an empty field is no number. */
export function readProtocolFields(
  fields: ProtocolFields,
  /** What the form does not ask for (the interval's level, seed …) stays as it was. */
  base: ProtocolChoices,
): { status: "valid"; choices: ProtocolChoices } | { status: "invalid"; problems: FieldProblem[] } {
  const problems: FieldProblem[] = [];
  const number = (field: NumberField): number | undefined => {
    const text = (fields[field] ?? "").trim();
    if (text === "") return undefined;
    const value = readDecimal(text);
    if (value === null) {
      problems.push({ field, sentence: `“${text}” is not a number; write it like 20 or 0.5.` });
      return undefined;
    }
    return value;
  };
  const needed = (field: NumberField): number => {
    const before = problems.length;
    const value = number(field);
    if (value === undefined && problems.length === before) {
      problems.push({ field, sentence: "A number is needed here." });
    }
    return value ?? 0;
  };
  const list = (field: string): number[] => {
    const parts = (fields[field] ?? "").split(/[\s;]+|,(?=\s|$)/).filter((part) => part !== "");
    // "30,40" may be two numbers or one.
    const values = parts.map((part) => (part.includes(",") ? null : readDecimal(part)));
    if (values.includes(null)) {
      problems.push({
        field,
        sentence: "Write numbers with a space between them and a decimal point, like 40 52.5 60.",
      });
    }
    return values.filter((value) => value !== null);
  };
  const terms = (["K", "B", "I"] as const).filter((term) => fields[`model.terms.${term}`] === "on");
  const isSmoothed = fields.derivative === "savitzky_golay";
  const ends = list("robustness.window_end_ms");
  const cutoffs = list("robustness.cutoff_hz");

  const value = {
    ...base,
    filter:
      fields.filter === "none"
        ? null
        : {
            family: "butterworth",
            order: needed("filter.order"),
            cutoff_hz: needed("filter.cutoff_hz"),
          },
    derivative: isSmoothed
      ? {
          savitzky_golay: {
            polynomial: needed("derivative.savitzky_golay.polynomial"),
            span_ms: needed("derivative.savitzky_golay.span_ms"),
          },
        }
      : "central",
    onset: {
      from: fields["onset.from"],
      cutoff_hz: needed("onset.cutoff_hz"),
      min_separation_ms: needed("onset.min_separation_ms"),
      expected_amplitude_deg: number("onset.expected_amplitude_deg") ?? null,
      expected_duration_ms: number("onset.expected_duration_ms") ?? null,
    },
    reflex_limit_ms: needed("reflex_limit_ms"),
    background: {
      target: number("background.target") ?? null,
      tolerance: number("background.tolerance") ?? null,
    },
    baseline_ms: [needed("baseline_ms.0"), needed("baseline_ms.1")],
    window_ms: [needed("window_ms.0"), needed("window_ms.1")],
    model: {
      terms,
      fixed: {
        K: number("model.fixed.K"),
        B: number("model.fixed.B"),
        I: number("model.fixed.I"),
      },
      nonnegative: fields["model.nonnegative"] === "on",
    },
    lag_ms: needed("lag_ms"),
    max_filled_samples: needed("max_filled_samples"),
    robustness:
      ends.length === 0 && cutoffs.length === 0
        ? undefined
        : { window_end_ms: ends, cutoff_hz: cutoffs },
  };
  if (problems.length > 0) return { status: "invalid", problems };
  return readProtocolChoices(value);
}

/** "0,5" and "0.5" and "−3"; null where it is no number. */
export function readDecimal(text: string): number | null {
  const plain = text.trim().replace("−", "-").replace(",", ".");
  if (!/^[-+]?(\d+\.?\d*|\.\d+)(e[-+]?\d+)?$/i.test(plain)) return null;
  const value = Number(plain);
  return Number.isFinite(value) ? value : null;
}
