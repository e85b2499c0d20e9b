import type { ReactNode } from "react";
import { Button } from "#app/components/button.tsx";
import { CheckField, SelectField, TextField } from "#app/components/field.tsx";
import {
  CalibrationFields,
  CalibrationHead,
  ChannelFields,
  columnOptions,
  errorOf,
  Guess,
  Line,
  type MapSurface,
  unitOptions,
} from "./channel-fields.tsx";
import {
  ANGLE_UNITS,
  type AxisDraft,
  type ChannelDraft,
  EMG_UNITS,
  type EmgDraft,
  type MapDraft,
  TIME_UNITS,
  TORQUE_UNITS,
} from "./map-draft.ts";

type ChangeMap = (change: (map: MapDraft) => MapDraft) => void;

/** Time, one or two axes, and what else a file may hold. */
export function MapFields({
  map,
  surface,
  axes,
  movementOf,
  onChange,
}: {
  map: MapDraft;
  surface: MapSurface;
  axes: readonly { name: string; label: string }[];
  /** Stands below an axis: its first movement. */
  movementOf: (axis: AxisDraft) => ReactNode;
  onChange: ChangeMap;
}) {
  return (
    <div className="flex flex-col gap-2">
      <TimeFields map={map} onChange={onChange} surface={surface} />
      {map.axes.map((axis) => (
        <AxisFields
          axis={axis}
          isOnly={map.axes.length === 1}
          key={axis.name}
          label={axes.find(({ name }) => name === axis.name)?.label ?? axis.name}
          onChange={(change) =>
            onChange((now) => ({
              ...now,
              axes: now.axes.map((one) => (one.name === axis.name ? change(one) : one)),
            }))
          }
          surface={surface}
        >
          {movementOf(axis)}
        </AxisFields>
      ))}
      {errorOf(surface, "axes") ? (
        <p className="border-l-2 border-ink pl-2 text-sm">{errorOf(surface, "axes")}</p>
      ) : null}
      <OtherChannels map={map} onChange={onChange} surface={surface} />
    </div>
  );
}

const STATED_RATE = "a stated rate";

function TimeFields({
  map,
  surface,
  onChange,
}: {
  map: MapDraft;
  surface: MapSurface;
  onChange: ChangeMap;
}) {
  // Columns carry a mark before their name, so that none can be taken for the stated rate.
  const options = [
    ...columnOptions(surface.preview).map(({ value, label }) => ({ value: `=${value}`, label })),
    { value: STATED_RATE, label: "no column: a stated rate" },
  ];
  const isRate = map.timeFrom === "rate";
  return (
    <Line word="time">
      <SelectField
        error={errorOf(surface, "time")}
        label="Time"
        labelHidden
        onChange={(event) => {
          const { value } = event.currentTarget;
          onChange((now) =>
            value === STATED_RATE
              ? { ...now, timeFrom: "rate" }
              : { ...now, timeFrom: "column", timeColumn: value.slice(1), isTimeGuess: false },
          );
        }}
        options={options}
        placeholder="which column"
        value={isRate ? STATED_RATE : map.timeColumn && `=${map.timeColumn}`}
      />
      {isRate ? (
        <TextField
          className="px-1.5 text-right font-mono text-figure"
          error={errorOf(surface, "rateHz")}
          inputMode="decimal"
          label="Rate, Hz"
          labelHidden
          onChange={(event) => {
            const rateHz = event.currentTarget.value;
            onChange((now) => ({ ...now, rateHz }));
          }}
          placeholder="Hz"
          value={map.rateHz}
        />
      ) : (
        <SelectField
          error={errorOf(surface, "timeUnit")}
          label="Time unit"
          labelHidden
          onChange={(event) => {
            const timeUnit = event.currentTarget.value;
            onChange((now) => ({ ...now, timeUnit }));
          }}
          options={unitOptions(TIME_UNITS)}
          placeholder="unit"
          value={map.timeUnit}
        />
      )}
      {map.isTimeGuess && !isRate ? <Guess /> : null}
    </Line>
  );
}

function AxisFields({
  axis,
  label,
  isOnly,
  surface,
  onChange,
  children,
}: {
  axis: AxisDraft;
  label: string;
  isOnly: boolean;
  surface: MapSurface;
  onChange: (change: (axis: AxisDraft) => AxisDraft) => void;
  children: ReactNode;
}) {
  const set = (key: "angle" | "torque" | "limbAngle") => (change: Partial<ChannelDraft>) =>
    onChange((now) => ({ ...now, [key]: { ...now[key], ...change } }));
  const hasOddNumber = surface.problems.some(
    ({ field }) => field.startsWith(`${axis.name}.`) && /\.(gain|offset)$/.test(field),
  );
  const hasLimb = axis.limbAngle.column !== "";
  const isPlain = [axis.angle, axis.torque, ...(hasLimb ? [axis.limbAngle] : [])].every(
    ({ gain, offset }) => gain === "1" && offset === "0",
  );
  return (
    <fieldset className="border-t border-rule pt-1.5">
      <legend className="sr-only">{label}</legend>
      {isOnly ? (
        <p className="font-semibold">{label}</p>
      ) : (
        <CheckField
          checked={axis.mapped}
          className="font-semibold"
          label={
            <>
              {label}
              <span className="sr-only"> is in this file</span>
            </>
          }
          onChange={(event) => {
            const mapped = event.currentTarget.checked;
            onChange((now) => ({ ...now, mapped }));
          }}
        />
      )}
      {axis.mapped ? (
        <div className="mt-1 flex flex-col gap-1.5">
          <ChannelFields
            axis={label}
            channel={axis.angle}
            field={`${axis.name}.angle`}
            onChange={set("angle")}
            surface={surface}
            units={ANGLE_UNITS}
            word="angle"
          />
          <ChannelFields
            axis={label}
            channel={axis.torque}
            field={`${axis.name}.torque`}
            onChange={set("torque")}
            surface={surface}
            units={TORQUE_UNITS}
            word="torque"
          />
          {children}
          <details open={hasOddNumber || undefined}>
            <summary className="min-h-6 text-sm text-ink-2">
              <span className="sr-only">{label}: </span>gain, offset, sign, limb’s own angle
              {isPlain ? "" : " (set)"}
            </summary>
            <div className="mt-1 flex flex-col gap-1.5">
              <CalibrationHead side={surface.side} />
              <CalibrationFields
                axis={label}
                channel={axis.angle}
                field={`${axis.name}.angle`}
                onChange={set("angle")}
                surface={surface}
                word="angle"
              />
              <CalibrationFields
                axis={label}
                channel={axis.torque}
                field={`${axis.name}.torque`}
                onChange={set("torque")}
                surface={surface}
                word="torque"
              />
              <ChannelFields
                axis={label}
                channel={axis.limbAngle}
                field={`${axis.name}.limbAngle`}
                onChange={set("limbAngle")}
                placeholder="none"
                surface={surface}
                units={ANGLE_UNITS}
                shown="limb"
                word="limb’s own angle"
              />
              {hasLimb ? (
                <CalibrationFields
                  axis={label}
                  channel={axis.limbAngle}
                  field={`${axis.name}.limbAngle`}
                  onChange={set("limbAngle")}
                  surface={surface}
                  shown="limb"
                  word="limb’s own angle"
                />
              ) : null}
            </div>
          </details>
        </div>
      ) : null}
    </fieldset>
  );
}

function OtherChannels({
  map,
  surface,
  onChange,
}: {
  map: MapDraft;
  surface: MapSurface;
  onChange: ChangeMap;
}) {
  const setEmg = (index: number, change: Partial<EmgDraft>) =>
    onChange((now) => ({
      ...now,
      emg: now.emg.map((channel, at) => (at === index ? { ...channel, ...change } : channel)),
    }));
  const columns = columnOptions(surface.preview);
  return (
    <div className="flex flex-col gap-1.5 border-t border-rule pt-2">
      <Line word="trigger">
        <div className="col-span-2">
          <SelectField
            error={errorOf(surface, "trigger")}
            label="Trigger"
            labelHidden
            onChange={(event) => {
              const trigger = event.currentTarget.value;
              onChange((now) => ({ ...now, trigger }));
            }}
            options={columns}
            placeholder="none"
            value={map.trigger}
          />
        </div>
      </Line>
      {map.emg.map((channel, index) => (
        // biome-ignore lint/suspicious/noArrayIndexKey: muscles have no name but their place while they are being typed.
        <fieldset className="flex flex-col gap-1" key={index}>
          <legend className="sr-only">Muscle {index + 1}</legend>
          <Line word={index === 0 ? "EMG" : ""}>
            <TextField
              error={errorOf(surface, `emg.${index}.muscle`)}
              label={`Muscle ${index + 1}`}
              labelHidden
              onChange={(event) => setEmg(index, { muscle: event.currentTarget.value })}
              placeholder="muscle"
              value={channel.muscle}
            />
            <Button
              aria-label={`Take muscle ${index + 1} away`}
              className="justify-self-end"
              look="quiet"
              onClick={() =>
                onChange((now) => ({ ...now, emg: now.emg.filter((_, at) => at !== index) }))
              }
              type="button"
            >
              ×
            </Button>
          </Line>
          <Line word="">
            <SelectField
              error={errorOf(surface, `emg.${index}.column`)}
              label={`Muscle ${index + 1} column`}
              labelHidden
              onChange={(event) => setEmg(index, { column: event.currentTarget.value })}
              options={columns}
              placeholder="which column"
              value={channel.column}
            />
            <SelectField
              error={errorOf(surface, `emg.${index}.unit`)}
              label={`Muscle ${index + 1} unit`}
              labelHidden
              onChange={(event) => setEmg(index, { unit: event.currentTarget.value })}
              options={unitOptions(EMG_UNITS)}
              placeholder="unit"
              value={channel.unit}
            />
          </Line>
        </fieldset>
      ))}
      <Line word={map.emg.length === 0 ? "EMG" : ""}>
        <div>
          <Button
            onClick={() =>
              onChange((now) => ({
                ...now,
                emg: [...now.emg, { muscle: "", column: "", unit: "mV" }],
              }))
            }
            type="button"
          >
            Add a muscle
          </Button>
        </div>
      </Line>
    </div>
  );
}
