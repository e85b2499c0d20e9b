import type { ReactNode } from "react";
import { SelectField, TextField } from "#app/components/field.tsx";
import type { TestedSide } from "#app/domain/rig-map.ts";
import type { TablePreview, Unit } from "#app/engine/types.ts";
import type { ChannelDraft, MapProblem, Sign } from "./map-draft.ts";

/** What the fields of one map share. */
export interface MapSurface {
  preview: TablePreview;
  problems: readonly MapProblem[];
  /** Null: the participant is not chosen, so signs belong to nobody. */
  side: TestedSide | null;
}

const UNIT_WORDS: Partial<Record<Unit, string>> = {
  deg: "°",
  "N.m": "N·m",
  "N.mm": "N·mm",
  "N.cm": "N·cm",
  "kN.m": "kN·m",
  us: "µs",
  uV: "µV",
};

export function errorOf(surface: MapSurface, field: string): string | null {
  return surface.problems.find((problem) => problem.field === field)?.sentence ?? null;
}

/** A word at the left, its fields at the right; the fields carry their own labels for who hears them. */
export function Line({ word, children }: { word: string; children: ReactNode }) {
  return (
    <div className="grid grid-cols-[4.25rem_minmax(0,1fr)_5rem] items-start gap-x-2">
      <span aria-hidden="true" className="pt-[5px] text-ink-2">
        {word}
      </span>
      {children}
    </div>
  );
}

/** Every column of the file by its name, with the unit that the file states. */
export function columnOptions({ header, units }: TablePreview) {
  return header
    .map((name, index) => ({ name, unit: units[index] ?? "" }))
    .filter(({ name }, index) => name !== "" && header.indexOf(name) === index)
    .map(({ name, unit }) => ({
      value: name,
      label: unit === "" || nameEndsInUnit(name, unit) ? name : `${name} (${unit})`,
    }));
}

/** "Angle (deg)", "angle_deg": the name says it already. */
function nameEndsInUnit(name: string, unit: string): boolean {
  return [`(${unit})`, `[${unit}]`, `_${unit}`, ` ${unit}`].some((end) => name.endsWith(end));
}

export function unitOptions(units: readonly Unit[]) {
  return units.map((unit) => ({ value: unit, label: UNIT_WORDS[unit] ?? unit }));
}

/** Column and unit of one channel, side by side. */
export function ChannelFields({
  surface,
  field,
  axis,
  word,
  shown = word,
  channel,
  units,
  placeholder = "which column",
  onChange,
}: {
  surface: MapSurface;
  /** "FE.angle": what its problems are filed under. */
  field: string;
  /** The axis in words; read out before the channel's own word. */
  axis: string;
  word: string;
  /** The word where there is little room. */
  shown?: string;
  channel: ChannelDraft;
  units: readonly Unit[];
  placeholder?: string;
  onChange: (change: Partial<ChannelDraft>) => void;
}) {
  return (
    <Line word={shown}>
      <SelectField
        error={errorOf(surface, `${field}.column`)}
        label={`${axis} ${word}`}
        labelHidden
        onChange={(event) => onChange({ column: event.currentTarget.value, isGuess: false })}
        options={columnOptions(surface.preview)}
        placeholder={placeholder}
        value={channel.column}
      />
      <SelectField
        error={errorOf(surface, `${field}.unit`)}
        label={`${axis} ${word} unit`}
        labelHidden
        onChange={(event) => onChange({ unit: event.currentTarget.value })}
        options={unitOptions(units)}
        placeholder="unit"
        value={channel.unit}
      />
      {channel.isGuess ? <Guess /> : null}
    </Line>
  );
}

/** Stands below a column that was proposed with doubt. */
export function Guess() {
  return (
    <p className="col-span-2 col-start-2 text-sm text-ink-2">A guess: compare it with the rows.</p>
  );
}

/** Gain, offset and sign of one channel, in one line. */
export function CalibrationFields({
  surface,
  field,
  axis,
  word,
  shown = word,
  channel,
  onChange,
}: {
  surface: MapSurface;
  field: string;
  axis: string;
  word: string;
  shown?: string;
  channel: ChannelDraft;
  onChange: (change: Partial<ChannelDraft>) => void;
}) {
  const { side } = surface;
  return (
    <div className="grid grid-cols-[4.25rem_3.5rem_3.5rem_minmax(0,1fr)] items-start gap-x-2">
      <span aria-hidden="true" className="pt-[5px] text-ink-2">
        {shown}
      </span>
      <TextField
        className="px-1.5 text-right font-mono text-figure"
        error={errorOf(surface, `${field}.gain`)}
        inputMode="decimal"
        label={`${axis} ${word} gain`}
        labelHidden
        onChange={(event) => onChange({ gain: event.currentTarget.value })}
        value={channel.gain}
      />
      <TextField
        className="px-1.5 text-right font-mono text-figure"
        error={errorOf(surface, `${field}.offset`)}
        inputMode="decimal"
        label={`${axis} ${word} offset`}
        labelHidden
        onChange={(event) => onChange({ offset: event.currentTarget.value })}
        value={channel.offset}
      />
      <SelectField
        disabled={side === null}
        label={`${axis} ${word} sign`}
        labelHidden
        onChange={(event) => {
          if (side === null) return;
          const sign: Sign = event.currentTarget.value === "-1" ? -1 : 1;
          onChange({ sign: { ...channel.sign, [side]: sign } });
        }}
        options={[
          { value: "1", label: "as recorded" },
          { value: "-1", label: "turned round" },
        ]}
        value={String(side === null ? 1 : channel.sign[side])}
      />
    </div>
  );
}

/** What the fields of `CalibrationFields` are, once above all of them. */
export function CalibrationHead({ side }: { side: TestedSide | null }) {
  return (
    <div
      aria-hidden="true"
      className="grid grid-cols-[4.25rem_3.5rem_3.5rem_minmax(0,1fr)] gap-x-2 text-sm text-ink-2"
    >
      <span />
      <span>gain</span>
      <span>offset</span>
      <span>{side === null ? "sign" : `sign, ${side} side`}</span>
    </div>
  );
}
