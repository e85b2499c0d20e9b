import { readDecimal } from "./protocol-form.ts";
import type { NewAxis, NewCondition, NewParticipant, NewPosture, StudySetUp } from "./study.ts";

/**
 * What stands in the fields of the set-up, as typed, turned into what the schemas of `study.ts`
 * check. Nothing is refused here: what is no number becomes NaN, which they refuse in words.
 */
export type TypedFields = Readonly<Record<string, unknown>>;

function textOf(typed: TypedFields, field: string): string {
  const value = typed[field];
  return typeof value === "string" ? value : "";
}

function numberOf(typed: TypedFields, field: string): number | null {
  const text = textOf(typed, field).trim();
  return text === "" ? null : (readDecimal(text) ?? Number.NaN);
}

function rowsOf(typed: TypedFields, field: string): TypedFields[] {
  const rows = typed[field];
  if (!Array.isArray(rows)) return [];
  return rows.map((row: unknown) => (isFields(row) ? row : {}));
}

function isFields(value: unknown): value is TypedFields {
  return typeof value === "object" && value !== null && !Array.isArray(value);
}

export function axisOfFields(typed: TypedFields): NewAxis {
  return {
    name: textOf(typed, "name"),
    label: textOf(typed, "label"),
    positive: textOf(typed, "positive"),
    negative: textOf(typed, "negative"),
  };
}

export function conditionOfFields(typed: TypedFields): NewCondition {
  return {
    name: textOf(typed, "name"),
    level: numberOf(typed, "level"),
    levelUnit: textOf(typed, "levelUnit").trim() || null,
    isBaseline: typed.isBaseline === "on",
    isActive: typed.isActive === "on",
  };
}

export function postureOfFields(typed: TypedFields): NewPosture {
  return { name: textOf(typed, "name") };
}

/** The side is what was chosen; the schema refuses what is neither. */
export function participantOfFields(
  typed: TypedFields,
): Omit<NewParticipant, "testedSide"> & { testedSide: string } {
  return {
    code: textOf(typed, "code"),
    testedSide: textOf(typed, "testedSide"),
    bodyMassKg: numberOf(typed, "bodyMassKg"),
    heightM: numberOf(typed, "heightM"),
  };
}

/** A new rig where a name is typed, else one of the lab's by its id. */
export function rigOfFields(typed: TypedFields): StudySetUp["rig"] {
  const name = textOf(typed, "rigName");
  const id = textOf(typed, "rigId");
  return name.trim() === "" && id !== "" ? { id } : { name };
}

export function studyOfFields(typed: unknown): unknown {
  const fields = isFields(typed) ? typed : {};
  return {
    name: textOf(fields, "name"),
    rig: rigOfFields(fields),
    axes: rowsOf(fields, "axes").map(axisOfFields),
    conditions: rowsOf(fields, "conditions").map(conditionOfFields),
    postures: rowsOf(fields, "postures").map(postureOfFields),
    participants: rowsOf(fields, "participants").map(participantOfFields),
  };
}
