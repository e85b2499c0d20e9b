import type { ReactNode } from "react";
import {
  data,
  Form,
  Link,
  redirect,
  type ShouldRevalidateFunctionArgs,
  useNavigation,
} from "react-router";
import type { z } from "zod";
import { deskContext } from "#app/auth/context.server.ts";
import { requireActor } from "#app/auth/require.server.ts";
import { Button, ButtonLink } from "#app/components/button.tsx";
import { Cautions } from "#app/components/cautions.tsx";
import { ErrorScreen } from "#app/components/error-screen.tsx";
import { FigureNumber } from "#app/components/figure-number.tsx";
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
import { listParticipants } from "#app/db/participants.server.ts";
import { listRigs } from "#app/db/rigs.server.ts";
import { findStudyPlan } from "#app/db/studies.server.ts";
import { countOf } from "#app/domain/quantity.ts";
import { notFound } from "#app/domain/refusal.ts";
import {
  axisSchema,
  conditionSchema,
  participantSchema,
  postureSchema,
  studySetUpSchema,
} from "#app/domain/study.ts";
import {
  axisOfFields,
  conditionOfFields,
  participantOfFields,
  postureOfFields,
  rigOfFields,
  type TypedFields,
} from "#app/domain/study-form.ts";
import {
  addPart,
  addParticipant,
  changeCondition,
  changeParticipant,
  changeStudy,
  removePart,
} from "#app/workflows/set-up-study.server.ts";
import type { Route } from "./+types/set-up.ts";

export function meta({ loaderData }: Route.MetaArgs): Route.MetaDescriptors {
  return [{ title: loaderData ? `Set-up of ${loaderData.study.name} · Ogee` : "Ogee" }];
}

export async function loader({ request, context, params }: Route.LoaderArgs) {
  const { lab } = await requireActor(request, context, "set_up_study");
  const { db } = context.get(deskContext).store;
  const study = await findStudyPlan(db, lab.id, params.id);
  if (!study) throw notFound();
  const [participants, rigs] = await Promise.all([
    listParticipants(db, study.id),
    listRigs(db, lab.id),
  ]);
  return {
    study,
    participants,
    rigs: rigs.map(({ id, name }) => ({ id, name })),
    /** The row that is shown as fields. */
    changing: new URL(request.url).searchParams.get("change"),
  };
}

// ---------------------------------------------------------------- action

/** Which form was sent, and for which row. */
const FORMS = [
  "study",
  "axis",
  "condition",
  "posture",
  "participant",
  "change_condition",
  "change_participant",
  "remove",
] as const;
type FormName = (typeof FORMS)[number];

type Outcome =
  | { status: "created" | "added" | "changed" | "removed" }
  | { status: "stale"; sentence: string }
  | { status: "refused"; field: string | null; sentence: string }
  | { status: "invalid"; problems: Record<string, string> };

export async function action({ request, context, params }: Route.ActionArgs) {
  const { actor, lab } = await requireActor(request, context, "set_up_study");
  const desk = context.get(deskContext);
  const study = await findStudyPlan(desk.store.db, lab.id, params.id);
  if (!study) throw notFound();
  const typed: TypedFields = Object.fromEntries(await request.formData());
  const form = FORMS.find((name) => name === typed.form);
  if (!form) throw notFound();
  const id = String(typed.id ?? "");
  const version = Number(typed.version);

  const outcome = await change();
  switch (outcome.status) {
    case "invalid":
      return data(
        { form, id, typed, problems: outcome.problems, said: null, isStale: false },
        { status: 400 },
      );
    case "refused": {
      const problems: Record<string, string> =
        outcome.field === null ? {} : { [outcome.field]: outcome.sentence };
      const said = outcome.field === null ? outcome.sentence : null;
      return data({ form, id, typed, problems, said, isStale: false }, { status: 400 });
    }
    case "stale":
      return data(
        { form, id, typed, problems: NO_PROBLEMS, said: outcome.sentence, isStale: true },
        { status: 409 },
      );
    default:
      return redirect(`/studies/${params.id}/set-up${anchorOf(form)}`);
  }

  async function change(): Promise<Outcome> {
    const studyId = params.id;
    switch (form) {
      case "study":
        return checked(
          studySetUpSchema.shape.name.safeParse(typed.name),
          (name) =>
            checked(
              studySetUpSchema.shape.rig.safeParse(rigOfFields(typed)),
              (rig) => changeStudy(desk, actor, { studyId, version, name, rig }),
              "rigName",
            ),
          "name",
        );
      case "axis":
        return checked(axisSchema.safeParse(axisOfFields(typed)), (values) =>
          addPart(desk, actor, { studyId, version, part: "axis", values }),
        );
      case "condition":
        return checked(conditionSchema.safeParse(conditionOfFields(typed)), (values) =>
          addPart(desk, actor, { studyId, version, part: "condition", values }),
        );
      case "posture":
        return checked(postureSchema.safeParse(postureOfFields(typed)), (values) =>
          addPart(desk, actor, { studyId, version, part: "posture", values }),
        );
      case "participant":
        return checked(participantSchema.safeParse(participantOfFields(typed)), (values) =>
          addParticipant(desk, actor, { studyId, values }),
        );
      case "change_condition":
        return checked(conditionSchema.safeParse(conditionOfFields(typed)), (values) =>
          changeCondition(desk, actor, { studyId, conditionId: id, version, values }),
        );
      case "change_participant":
        return checked(participantSchema.safeParse(participantOfFields(typed)), (values) =>
          changeParticipant(desk, actor, { studyId, participantId: id, version, values }),
        );
      default: {
        const part = PARTS.find((name) => name === typed.part);
        if (!part) throw notFound();
        return removePart(desk, actor, { studyId, part, id, version });
      }
    }
  }
}

const NO_PROBLEMS: Record<string, string> = {};

const PARTS = ["axis", "condition", "posture", "participant"] as const;

/** Goes on with what was typed where it is right; else says what is wrong, field by field. */
async function checked<T>(
  read: z.ZodSafeParseResult<T>,
  goOn: (value: T) => Promise<Outcome>,
  /** The field of a schema that is one value. */
  only?: string,
): Promise<Outcome> {
  if (read.success) return goOn(read.data);
  const problems: Record<string, string> = {};
  for (const issue of read.error.issues) {
    const field = only ?? String(issue.path[0] ?? "");
    problems[field] ??= issue.message;
  }
  return { status: "invalid", problems };
}

/** Back to where the change was made. */
function anchorOf(form: FormName): string {
  switch (form) {
    case "axis":
      return "#axes";
    case "condition":
    case "change_condition":
      return "#conditions";
    case "posture":
      return "#postures";
    case "participant":
    case "change_participant":
      return "#participants";
    default:
      return "";
  }
}

// ---------------------------------------------------------------- page

type Answer = Route.ComponentProps["actionData"];

/** A refusal because of somebody else's change shows that change: what stands now is read again. */
export function shouldRevalidate({
  actionStatus,
  defaultShouldRevalidate,
}: ShouldRevalidateFunctionArgs): boolean {
  return actionStatus === 409 || defaultShouldRevalidate;
}

export default function SetUp({ loaderData, actionData }: Route.ComponentProps) {
  const { study, participants, rigs, changing } = loaderData;
  const version = study.version;
  const bindOf = (form: FormName, current: Record<string, string> = {}, id = "") =>
    bindTo(actionData, form, id, current);

  return (
    <>
      <PageHead
        actions={<ButtonLink to={`/studies/${study.id}`}>To its progress</ButtonLink>}
        facts={["What has recordings stays; the rest can be changed."]}
        title={`Set-up of ${study.name}`}
      />
      {actionData?.said ? <Notice urgent>{actionData.said}</Notice> : null}

      <Part id="study" title="Study and rig">
        <ChangeForm form="study" label="Study and rig" version={version}>
          <StandsNow
            answer={actionData}
            form="study"
            words={`${study.name}, ${study.rig?.name ?? "no rig"}`}
          />
          <StudyFields
            bind={bindOf("study", { name: study.name, rigId: study.rig?.id ?? "" })}
            rigs={rigs}
          />
          <SaveButton form="study">Save name and rig</SaveButton>
        </ChangeForm>
      </Part>

      <Part id="axes" title="Axes">
        <ul>
          {study.axes.map((axis) => (
            <Line
              actions={<Remove id={axis.id} name={axis.name} part="axis" version={version} />}
              key={axis.id}
            >
              <span className="num inline-block w-16">{axis.name}</span>
              {axis.label}
              <span className="text-ink-2">
                , positive towards {axis.positive}, negative towards {axis.negative}
              </span>
            </Line>
          ))}
        </ul>
        <ChangeForm
          form="axis"
          key={`axis-${study.axes.length}`}
          label="Add an axis"
          version={version}
        >
          <AxisFields
            actions={<SaveButton form="axis">Add axis</SaveButton>}
            bind={bindOf("axis")}
          />
        </ChangeForm>
      </Part>

      <Part id="conditions" title="Conditions, in their order">
        <ul>
          {study.conditions.map((condition) =>
            changing === condition.id ? (
              <li className="border-b border-rule bg-sheet" key={condition.id}>
                <ChangeForm
                  form="change_condition"
                  id={condition.id}
                  label={`Change ${condition.name}`}
                  version={version}
                >
                  <StandsNow
                    answer={actionData}
                    form="change_condition"
                    id={condition.id}
                    words={conditionInWords(condition)}
                  />
                  <ConditionFields
                    actions={<RowEnd form="change_condition" />}
                    bind={bindOf(
                      "change_condition",
                      {
                        name: condition.name,
                        level: condition.level === null ? "" : String(condition.level),
                        levelUnit: condition.levelUnit ?? "",
                        isBaseline: condition.isBaseline ? "on" : "",
                        isActive: condition.isActive ? "on" : "",
                      },
                      condition.id,
                    )}
                  />
                </ChangeForm>
              </li>
            ) : (
              <Line
                actions={
                  <>
                    <ChangeLink id={condition.id} name={condition.name} />
                    <Remove
                      id={condition.id}
                      name={condition.name}
                      part="condition"
                      version={version}
                    />
                  </>
                }
                key={condition.id}
              >
                {condition.name}
                <span className="text-ink-2">
                  {condition.level === null ? null : (
                    <>
                      ,{" "}
                      <span className="num">
                        {condition.level} {condition.levelUnit}
                      </span>
                    </>
                  )}
                  {condition.isBaseline ? ", the baseline" : null}
                  {condition.isActive ? ", active" : null}
                </span>
              </Line>
            ),
          )}
        </ul>
        <ChangeForm
          form="condition"
          key={`condition-${study.conditions.length}`}
          label="Add a condition"
          version={version}
        >
          <ConditionFields
            actions={<SaveButton form="condition">Add condition</SaveButton>}
            bind={bindOf("condition")}
          />
        </ChangeForm>
      </Part>

      <Part id="postures" title="Postures">
        <ul>
          {study.postures.map((posture) => (
            <Line
              actions={
                <Remove id={posture.id} name={posture.name} part="posture" version={version} />
              }
              key={posture.id}
            >
              {posture.name}
            </Line>
          ))}
        </ul>
        <ChangeForm
          form="posture"
          key={`posture-${study.postures.length}`}
          label="Add a posture"
          version={version}
        >
          <PostureFields
            actions={<SaveButton form="posture">Add posture</SaveButton>}
            bind={bindOf("posture")}
          />
        </ChangeForm>
      </Part>

      <Part
        hint={
          participants.length === 0
            ? "Codes only: never a name or a date of birth."
            : countOf(participants.length, "participant")
        }
        id="participants"
        title="Participants"
      >
        <ul>
          {participants.map((participant) =>
            changing === participant.id ? (
              <li className="border-b border-rule bg-sheet" key={participant.id}>
                <ChangeForm
                  form="change_participant"
                  id={participant.id}
                  label={`Change ${participant.code}`}
                  version={participant.version}
                >
                  <StandsNow
                    answer={actionData}
                    form="change_participant"
                    id={participant.id}
                    words={participantInWords(participant)}
                  />
                  <ParticipantFields
                    actions={<RowEnd form="change_participant" />}
                    bind={bindOf(
                      "change_participant",
                      {
                        code: participant.code,
                        testedSide: participant.testedSide,
                        bodyMassKg: String(participant.bodyMassKg ?? ""),
                        heightM: String(participant.heightM ?? ""),
                      },
                      participant.id,
                    )}
                  />
                </ChangeForm>
              </li>
            ) : (
              <Line
                actions={
                  <>
                    <ChangeLink id={participant.id} name={participant.code} />
                    <Remove
                      id={participant.id}
                      name={participant.code}
                      part="participant"
                      version={version}
                    />
                  </>
                }
                key={participant.id}
              >
                <span className="num inline-block w-16">{participant.code}</span>
                <span className="inline-block w-14">{participant.testedSide}</span>
                <span className="inline-block w-20 text-right">
                  <FigureNumber decimals={1} unit="kg" value={participant.bodyMassKg} />
                </span>
                <span className="inline-block w-20 text-right">
                  <FigureNumber decimals={2} unit="m" value={participant.heightM} />
                </span>
              </Line>
            ),
          )}
        </ul>
        <ChangeForm
          form="participant"
          key={`participant-${participants.length}`}
          label="Add a participant"
          version={version}
        >
          <ParticipantFields
            actions={<SaveButton form="participant">Add participant</SaveButton>}
            bind={bindOf("participant")}
          />
        </ChangeForm>
      </Part>
      <Cautions length="full" />
    </>
  );
}

/** The other state, above the fields that keep what was typed. */
function StandsNow({
  answer,
  form,
  id = "",
  words,
}: {
  answer: Answer;
  form: FormName;
  id?: string;
  words: string;
}) {
  if (!answer?.isStale || answer.form !== form || answer.id !== id) return null;
  return (
    <p className="mb-2 border-l-2 border-ink pl-2.5">
      Stands now: <span className="font-semibold">{words}</span>
    </p>
  );
}

function conditionInWords(condition: {
  name: string;
  level: number | null;
  levelUnit: string | null;
  isBaseline: boolean;
  isActive: boolean;
}): string {
  const level = condition.level === null ? null : `${condition.level} ${condition.levelUnit ?? ""}`;
  return [
    condition.name,
    level,
    condition.isBaseline ? "the baseline" : null,
    condition.isActive ? "active" : null,
  ]
    .filter((part) => part !== null)
    .join(", ");
}

function participantInWords(participant: {
  code: string;
  testedSide: string;
  bodyMassKg: number | null;
  heightM: number | null;
}): string {
  const { code, testedSide, bodyMassKg, heightM } = participant;
  return [
    code,
    testedSide,
    bodyMassKg === null ? null : `${bodyMassKg} kg`,
    heightM === null ? null : `${heightM} m`,
  ]
    .filter((part) => part !== null)
    .join(", ");
}

/** What was typed wins over what is stored, in the form that was sent. */
function bindTo(
  answer: Answer,
  form: FormName,
  id: string,
  current: Record<string, string>,
): BindField {
  const mine = answer?.form === form && answer.id === id ? answer : null;
  return (field) => {
    const typed = mine ? mine.typed[field] : current[field];
    return {
      name: field,
      defaultValue: typeof typed === "string" ? typed : "",
      error: mine?.problems[field] ?? (field === "rigName" ? mine?.problems.rig : null) ?? null,
    };
  };
}

function Part({
  id,
  title,
  hint,
  children,
}: {
  id: string;
  title: string;
  hint?: string;
  children: ReactNode;
}) {
  return (
    <section aria-labelledby={id} className="mb-8 max-w-5xl">
      <h2 className="border-b border-ink pb-1" id={id}>
        {title}
      </h2>
      {hint ? <p className="pt-1 text-sm text-ink-2">{hint}</p> : null}
      {children}
    </section>
  );
}

function Line({ actions, children }: { actions: ReactNode; children: ReactNode }) {
  return (
    <li className="flex min-h-8 flex-wrap items-center justify-between gap-x-4 border-b border-rule py-0.5 hover:bg-hover">
      <span className="min-w-0">{children}</span>
      <span className="ml-auto flex items-center">{actions}</span>
    </li>
  );
}

function ChangeForm({
  form,
  id = "",
  version,
  label,
  children,
}: {
  form: FormName;
  id?: string;
  version: number;
  label: string;
  children: ReactNode;
}) {
  return (
    <Form aria-label={label} className="pt-2" method="post" noValidate preventScrollReset>
      <input name="form" type="hidden" value={form} />
      <input name="id" type="hidden" value={id} />
      <input name="version" type="hidden" value={version} />
      {children}
    </Form>
  );
}

function SaveButton({ form, children }: { form: FormName; children: ReactNode }) {
  const navigation = useNavigation();
  const isBusy = navigation.state === "submitting" && navigation.formData?.get("form") === form;
  return (
    <Button busy={isBusy} busyLabel="Saving" className={form === "study" ? "mt-3" : ""}>
      {children}
    </Button>
  );
}

function RowEnd({ form }: { form: FormName }) {
  return (
    <>
      <SaveButton form={form}>Save</SaveButton>
      <ButtonLink look="quiet" preventScrollReset to="?">
        Leave
      </ButtonLink>
    </>
  );
}

function ChangeLink({ id, name }: { id: string; name: string }) {
  return (
    <Link
      aria-label={`Change ${name}`}
      className="inline-flex min-h-6 items-center px-1.5 text-ink-2 hover:text-ink"
      preventScrollReset
      to={`?change=${id}`}
    >
      Change
    </Link>
  );
}

function Remove({
  part,
  id,
  name,
  version,
}: {
  part: (typeof PARTS)[number];
  id: string;
  name: string;
  version: number;
}) {
  return (
    <Form method="post" preventScrollReset>
      <input name="form" type="hidden" value="remove" />
      <input name="part" type="hidden" value={part} />
      <input name="id" type="hidden" value={id} />
      <input name="version" type="hidden" value={version} />
      <button
        aria-label={`Take out ${name}`}
        className="inline-flex min-h-6 items-center px-1.5 text-ink-2 hover:text-ink"
        type="submit"
      >
        Take out
      </button>
    </Form>
  );
}

export function ErrorBoundary() {
  return <ErrorScreen />;
}
