import { type FieldMetadata, type FormMetadata, useForm } from "@conform-to/react";
import { parseWithZod } from "@conform-to/zod/v4";
import type { ReactNode } from "react";
import { data, Form, redirect, useNavigation } from "react-router";
import { z } from "zod";
import { deskContext } from "#app/auth/context.server.ts";
import { requireActor } from "#app/auth/require.server.ts";
import { Button, ButtonLink } from "#app/components/button.tsx";
import { Cautions } from "#app/components/cautions.tsx";
import { ErrorScreen } from "#app/components/error-screen.tsx";
import { FieldError } from "#app/components/field.tsx";
import { Notice } from "#app/components/notice.tsx";
import { PageHead } from "#app/components/page-head.tsx";
import {
  AxisFields,
  type BindField,
  ConditionFields,
  ParticipantFields,
  PostureFields,
  StudyFields,
} from "#app/components/study-fields.tsx";
import { listRigs } from "#app/db/rigs.server.ts";
import { studySetUpSchema } from "#app/domain/study.ts";
import { studyOfFields } from "#app/domain/study-form.ts";
import { createStudy } from "#app/workflows/set-up-study.server.ts";
import type { Route } from "./+types/new.ts";

/** Every field as typed; the numbers are read by `studyOfFields`. */
type Typed = {
  name: string;
  rigId: string;
  rigName: string;
  axes: { name: string; label: string; positive: string; negative: string }[];
  conditions: {
    name: string;
    level: string;
    levelUnit: string;
    isBaseline: string;
    isActive: string;
  }[];
  postures: { name: string }[];
  participants: { code: string; testedSide: string; bodyMassKg: string; heightM: string }[];
};

const typedStudySchema = z.unknown().transform(studyOfFields).pipe(studySetUpSchema);

export function meta(): Route.MetaDescriptors {
  return [{ title: "Set up a study · Ogee" }];
}

export async function loader({ request, context }: Route.LoaderArgs) {
  const { lab } = await requireActor(request, context, "set_up_study");
  const rigs = await listRigs(context.get(deskContext).store.db, lab.id);
  return { rigs: rigs.map(({ id, name }) => ({ id, name })) };
}

export async function action({ request, context }: Route.ActionArgs) {
  const { actor } = await requireActor(request, context, "set_up_study");
  const submission = parseWithZod(await request.formData(), {
    schema: typedStudySchema,
    disableAutoCoercion: true,
  });
  // A button that adds or takes away a row comes here too where there are no scripts.
  if (submission.status !== "success") {
    return data(submission.reply(), { status: submission.status === "error" ? 400 : 200 });
  }
  const created = await createStudy(context.get(deskContext), actor, submission.value);
  if (created.status === "refused") {
    const fieldErrors = { [created.field ?? ""]: [created.sentence] };
    return data(submission.reply({ fieldErrors }), { status: 400 });
  }
  return redirect(`/studies/${created.studyId}`);
}

const EMPTY_AXIS = { name: "", label: "", positive: "", negative: "" };
const EMPTY_CONDITION = { name: "", level: "", levelUnit: "", isBaseline: "", isActive: "" };
const EMPTY_PARTICIPANT = { code: "", testedSide: "", bodyMassKg: "", heightM: "" };

export default function NewStudy({ loaderData, actionData }: Route.ComponentProps) {
  const { rigs } = loaderData;
  const isBusy = useNavigation().state === "submitting";
  const [form, fields] = useForm<Typed>({
    id: "new-study",
    lastResult: actionData,
    defaultValue: {
      name: "",
      rigId: rigs[0]?.id ?? "",
      rigName: "",
      axes: [EMPTY_AXIS],
      conditions: [{ ...EMPTY_CONDITION, isBaseline: "on" }, EMPTY_CONDITION],
      postures: [{ name: "" }],
      participants: [],
    },
  });
  const isRefused = actionData?.status === "error";
  // Where the union of rig's id and name is refused, the sentence belongs to the name.
  const rigErrors = form.allErrors.rig ?? form.allErrors["rig.name"];

  return (
    <>
      <PageHead title="Set up a study" />
      <Form
        aria-label="Set up a study"
        className="max-w-5xl"
        id={form.id}
        method="post"
        noValidate
        onSubmit={form.onSubmit}
      >
        {/* Return in a field saves, not the first row's button. */}
        <button aria-hidden="true" className="sr-only" tabIndex={-1} type="submit">
          Save this study
        </button>
        {isRefused ? (
          <Notice urgent>
            Something is not right yet; a sentence stands beside each field. Nothing was saved, and
            what you typed is still here.
          </Notice>
        ) : null}

        <Part title="Study and rig">
          <StudyFields
            bind={(field) => {
              const bound = bindTo(fields)(field);
              return field === "rigName" && rigErrors ? { ...bound, error: rigErrors } : bound;
            }}
            rigs={rigs}
          />
        </Part>

        <Part
          error={fields.axes.errors}
          hint="What the rig turns about, and what each direction is called. The short name stands in files and exports."
          title="Axes"
        >
          {fields.axes.getFieldList().map((axis, place, all) => (
            <AxisFields
              actions={
                all.length > 1 ? (
                  <RemoveRow form={form} name={fields.axes.name} what="axis" place={place} />
                ) : null
              }
              bind={bindTo(axis.getFieldset())}
              first={place === 0}
              key={axis.key}
            />
          ))}
          <Button
            {...form.insert.getButtonProps({ name: fields.axes.name, defaultValue: EMPTY_AXIS })}
            className="mt-2"
          >
            Add an axis
          </Button>
        </Part>

        <Part
          error={fields.conditions.errors}
          hint="In the order in which figures show them. A level is a number that grows with them (pressure, tension, turns); where a muscle is active, say so: it stands apart from passive ones."
          title="Conditions"
        >
          {fields.conditions.getFieldList().map((condition, place, all) => (
            <ConditionFields
              actions={
                <>
                  {place > 0 ? (
                    <Button
                      {...form.reorder.getButtonProps({
                        name: fields.conditions.name,
                        from: place,
                        to: place - 1,
                      })}
                      aria-label={`Move condition ${place + 1} up`}
                      look="quiet"
                    >
                      ↑
                    </Button>
                  ) : null}
                  {all.length > 1 ? (
                    <RemoveRow
                      form={form}
                      name={fields.conditions.name}
                      place={place}
                      what="condition"
                    />
                  ) : null}
                </>
              }
              bind={bindTo(condition.getFieldset())}
              first={place === 0}
              key={condition.key}
            />
          ))}
          <Button
            {...form.insert.getButtonProps({
              name: fields.conditions.name,
              defaultValue: EMPTY_CONDITION,
            })}
            className="mt-2"
          >
            Add a condition
          </Button>
        </Part>

        <Part error={fields.postures.errors} title="Postures">
          {fields.postures.getFieldList().map((posture, place, all) => (
            <PostureFields
              actions={
                all.length > 1 ? (
                  <RemoveRow form={form} name={fields.postures.name} what="posture" place={place} />
                ) : null
              }
              bind={bindTo(posture.getFieldset())}
              first={place === 0}
              key={posture.key}
            />
          ))}
          <Button
            {...form.insert.getButtonProps({
              name: fields.postures.name,
              defaultValue: { name: "" },
            })}
            className="mt-2"
          >
            Add a posture
          </Button>
        </Part>

        <Part
          error={fields.participants.errors}
          hint="Codes only: never a name or a date of birth. Participants can be added later too."
          title="Participants"
        >
          {fields.participants.getFieldList().map((participant, place) => (
            <ParticipantFields
              actions={
                <RemoveRow
                  form={form}
                  name={fields.participants.name}
                  what="participant"
                  place={place}
                />
              }
              bind={bindTo(participant.getFieldset())}
              first={place === 0}
              key={participant.key}
            />
          ))}
          <Button
            {...form.insert.getButtonProps({
              name: fields.participants.name,
              defaultValue: EMPTY_PARTICIPANT,
            })}
            className="mt-2"
          >
            Add a participant
          </Button>
        </Part>

        <FieldError error={form.errors} />
        <div className="my-4 flex flex-wrap items-center gap-2">
          <Button busy={isBusy} busyLabel="Saving" look="do">
            Save this study
          </Button>
          <ButtonLink to="/studies">Leave without saving</ButtonLink>
        </div>
      </Form>
      <div className="mt-6">
        <Cautions length="full" />
      </div>
    </>
  );
}

/** The fields of a set as a row's components take them. */
function bindTo(fieldset: Record<string, FieldMetadata<unknown>>): BindField {
  return (field) => {
    const bound = fieldset[field];
    if (!bound) throw new RangeError(`The form has no field called ${field}.`);
    const { initialValue } = bound;
    return {
      name: bound.name,
      id: bound.id,
      defaultValue: typeof initialValue === "string" ? initialValue : "",
      error: bound.errors ?? null,
    };
  };
}

function Part({
  title,
  hint,
  error,
  children,
}: {
  title: string;
  hint?: string;
  error?: string[];
  children: ReactNode;
}) {
  return (
    <fieldset className="border-t border-rule pt-3 pb-5">
      <legend className="float-left mb-1 w-full font-semibold">{title}</legend>
      <div className="clear-both">
        {hint ? <p className="mb-2 max-w-prose text-sm text-ink-2">{hint}</p> : null}
        {children}
        <FieldError error={error} />
      </div>
    </fieldset>
  );
}

function RemoveRow({
  form,
  name,
  place,
  what,
}: {
  form: FormMetadata<Typed>;
  name: string;
  place: number;
  what: string;
}) {
  return (
    <Button
      {...form.remove.getButtonProps({ name, index: place })}
      aria-label={`Take out ${what} ${place + 1}`}
      look="quiet"
    >
      Take out
    </Button>
  );
}

export function ErrorBoundary() {
  return <ErrorScreen />;
}
