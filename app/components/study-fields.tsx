import type { ReactNode } from "react";
import { CheckField, SelectField, TextField } from "./field.tsx";

/** One field of a row as a form knows it: what it is called, what was typed, what is wrong. */
export interface BoundField {
  name: string;
  id?: string;
  defaultValue?: string;
  error?: string | string[] | null;
}

/** Gives the field of this row that is called so ("label"). */
export type BindField = (field: string) => BoundField;

interface RowProps {
  bind: BindField;
  /** The rows below the first carry their labels for those who hear them; the first shows them. */
  first?: boolean;
  /** Buttons of the row. */
  actions?: ReactNode;
}

/** A row of fields: side by side on a wide screen, one below the other on a narrow one. */
function Row({
  columns,
  first,
  actions,
  children,
}: {
  columns: string;
  first: boolean;
  actions: ReactNode;
  children: ReactNode;
}) {
  return (
    <div
      className={`grid grid-cols-2 items-start gap-x-3 gap-y-2 border-b border-rule py-2 md:border-0 md:py-1 ${columns}`}
    >
      {children}
      {actions ? (
        <div className={`flex items-center gap-1 self-end md:self-start ${first ? "md:pt-6" : ""}`}>
          {actions}
        </div>
      ) : null}
    </div>
  );
}

export function AxisFields({ bind, first = true, actions }: RowProps) {
  const labelHidden = first ? undefined : "wide";
  return (
    <Row actions={actions} columns="md:grid-cols-[5rem_2fr_1fr_1fr_9rem]" first={first}>
      <TextField {...bind("name")} label="Short name" labelHidden={labelHidden} maxLength={12} />
      <TextField {...bind("label")} label="In words" labelHidden={labelHidden} maxLength={60} />
      <TextField
        {...bind("positive")}
        label="Positive towards"
        labelHidden={labelHidden}
        maxLength={40}
      />
      <TextField
        {...bind("negative")}
        label="Negative towards"
        labelHidden={labelHidden}
        maxLength={40}
      />
    </Row>
  );
}

export function ConditionFields({ bind, first = true, actions }: RowProps) {
  const labelHidden = first ? undefined : "wide";
  const { defaultValue: isBaseline, ...baseline } = bind("isBaseline");
  const { defaultValue: isActive, ...active } = bind("isActive");
  return (
    <Row actions={actions} columns="md:grid-cols-[2fr_5rem_6rem_6rem_5rem_9rem]" first={first}>
      <div className="col-span-2 md:col-span-1">
        <TextField {...bind("name")} label="Condition" labelHidden={labelHidden} maxLength={60} />
      </div>
      <TextField
        {...bind("level")}
        className="num"
        inputMode="decimal"
        label="Level"
        labelHidden={labelHidden}
      />
      <TextField
        {...bind("levelUnit")}
        className="num"
        label="Unit"
        labelHidden={labelHidden}
        maxLength={20}
      />
      <CheckField
        {...baseline}
        className={first ? "md:pt-6.5" : "md:pt-0.5"}
        defaultChecked={isBaseline === "on"}
        label="baseline"
        value="on"
      />
      <CheckField
        {...active}
        className={first ? "md:pt-6.5" : "md:pt-0.5"}
        defaultChecked={isActive === "on"}
        label="active"
        value="on"
      />
    </Row>
  );
}

export function PostureFields({ bind, first = true, actions }: RowProps) {
  return (
    <Row actions={actions} columns="md:grid-cols-[16rem_9rem]" first={first}>
      <TextField
        {...bind("name")}
        label="Posture"
        labelHidden={first ? undefined : "wide"}
        maxLength={60}
      />
    </Row>
  );
}

export function ParticipantFields({ bind, first = true, actions }: RowProps) {
  const labelHidden = first ? undefined : "wide";
  return (
    <Row actions={actions} columns="md:grid-cols-[8rem_8rem_8rem_8rem_9rem]" first={first}>
      <TextField
        {...bind("code")}
        className="num"
        label="Code"
        labelHidden={labelHidden}
        maxLength={20}
      />
      <SelectField
        {...bind("testedSide")}
        label="Tested side"
        labelHidden={labelHidden}
        options={[
          { value: "right", label: "right" },
          { value: "left", label: "left" },
        ]}
        placeholder="choose"
      />
      <TextField
        {...bind("bodyMassKg")}
        className="num"
        inputMode="decimal"
        label="Body mass"
        labelHidden={labelHidden}
        unit="kg"
      />
      <TextField
        {...bind("heightM")}
        className="num"
        inputMode="decimal"
        label="Height"
        labelHidden={labelHidden}
        unit="m"
      />
    </Row>
  );
}

/** Name of the study and what moves the joint. */
export function StudyFields({
  bind,
  rigs,
}: {
  bind: BindField;
  rigs: readonly { id: string; name: string }[];
}) {
  return (
    <div className="grid max-w-3xl grid-cols-1 items-start gap-x-6 gap-y-3 md:grid-cols-2">
      <div className="md:col-span-2 md:max-w-md">
        <TextField {...bind("name")} label="Name of the study" maxLength={120} />
      </div>
      {rigs.length > 0 ? (
        <SelectField
          {...bind("rigId")}
          label="Rig that moves the joint"
          options={rigs.map((rig) => ({ value: rig.id, label: rig.name }))}
          placeholder="a new rig, named beside"
        />
      ) : null}
      <TextField
        {...bind("rigName")}
        label={rigs.length > 0 ? "Or a new rig, by its name" : "Rig that moves the joint"}
        maxLength={80}
      />
    </div>
  );
}
