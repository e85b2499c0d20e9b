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

/** A label that is read out whole ("flexion–extension angle") and drawn short ("angle"). */
export function spoken(before: string, shown: string, after = "") {
  return (
    <>
      {before ? <span className="sr-only">{before} </span> : null}
      {shown}
      {after ? <span className="sr-only"> {after}</span> : null}
    </>
  );
}

/** Every column of the file by its name, with the unit that the file states. */
export function columnOptions({ header, units }: TablePreview) {
  return header
    .map((name, index) => ({ name, unit: units[index] ?? "" }))
    .filter(({ name }, index) => name !== "" && header.indexOf(name) === index)
    .map(({ name, unit }) => ({ value: name, label: unit === "" ? name : `${name} (${unit})` }));
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
  channel: ChannelDraft;
  units: readonly Unit[];
  placeholder?: string;
  onChange: (change: Partial<ChannelDraft>) => void;
}) {
  return (
    <div className="grid grid-cols-[minmax(0,1fr)_5.5rem] items-start gap-x-2">
      <SelectField
        error={errorOf(surface, `${field}.column`)}
        hint={channel.isGuess ? "A guess: look at the first rows." : undefined}
        label={spoken(axis, word)}
        onChange={(event) => {
          const column = event.currentTarget.value;
          onChange({ column, isGuess: false });
        }}
        options={columnOptions(surface.preview)}
        placeholder={placeholder}
        value={channel.column}
      />
      <SelectField
        error={errorOf(surface, `${field}.unit`)}
        label={spoken(`${axis} ${word}`, "unit")}
        onChange={(event) => onChange({ unit: event.currentTarget.value })}
        options={unitOptions(units)}
        placeholder="which"
        value={channel.unit}
      />
    </div>
  );
}

/** Gain, offset and sign of one channel, in one line. */
export function CalibrationFields({
  surface,
  field,
  axis,
  word,
  channel,
  onChange,
}: {
  surface: MapSurface;
  field: string;
  axis: string;
  word: string;
  channel: ChannelDraft;
  onChange: (change: Partial<ChannelDraft>) => void;
}) {
  const { side } = surface;
  return (
    <div className="grid grid-cols-[4.5rem_4.5rem_minmax(0,1fr)] items-start gap-x-2">
      <TextField
        className="text-right font-mono text-figure"
        error={errorOf(surface, `${field}.gain`)}
        inputMode="decimal"
        label={spoken(`${axis} ${word}`, "gain")}
        onChange={(event) => onChange({ gain: event.currentTarget.value })}
        value={channel.gain}
      />
      <TextField
        className="text-right font-mono text-figure"
        error={errorOf(surface, `${field}.offset`)}
        inputMode="decimal"
        label={spoken(`${axis} ${word}`, "offset")}
        onChange={(event) => onChange({ offset: event.currentTarget.value })}
        value={channel.offset}
      />
      <SelectField
        disabled={side === null}
        label={spoken(`${axis} ${word}`, "sign", side ? `for the ${side} side` : "")}
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
