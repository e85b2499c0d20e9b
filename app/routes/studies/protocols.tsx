import type { ReactNode } from "react";
import {
  data,
  Form,
  Link,
  redirect,
  type ShouldRevalidateFunctionArgs,
  useNavigation,
} from "react-router";
import { deskContext } from "#app/auth/context.server.ts";
import { requireActor } from "#app/auth/require.server.ts";
import { Button, ButtonLink } from "#app/components/button.tsx";
import { Cautions } from "#app/components/cautions.tsx";
import { Empty } from "#app/components/empty.tsx";
import { ErrorScreen } from "#app/components/error-screen.tsx";
import {
  CheckField,
  FieldError,
  SelectField,
  TextAreaField,
  TextField,
} from "#app/components/field.tsx";
import { Notice } from "#app/components/notice.tsx";
import { PageHead } from "#app/components/page-head.tsx";
import { TermLetter } from "#app/components/term-row.tsx";
import { readChoices } from "#app/db/fits.server.ts";
import { listProtocols } from "#app/db/protocols.server.ts";
import { findStudyPlan } from "#app/db/studies.server.ts";
import { type DescribedChoice, defaultChoices, describeChoices } from "#app/domain/protocol.ts";
import {
  fieldsOfChoices,
  type ProtocolFields,
  readProtocolFields,
} from "#app/domain/protocol-form.ts";
import { countOf, formatMoment, TERM_NAMES, TERM_UNITS } from "#app/domain/quantity.ts";
import { notFound } from "#app/domain/refusal.ts";
import { may } from "#app/domain/role.ts";
import { TERMS } from "#app/engine/types.ts";
import { addProtocol } from "#app/workflows/set-up-study.server.ts";
import type { Route } from "./+types/protocols.ts";

export function meta({ loaderData }: Route.MetaArgs): Route.MetaDescriptors {
  return [{ title: loaderData ? `Protocols of ${loaderData.studyName} · Ogee` : "Ogee" }];
}

export async function loader({ request, context, params }: Route.LoaderArgs) {
  const { actor, lab } = await requireActor(request, context);
  const { db } = context.get(deskContext).store;
  const plan = await findStudyPlan(db, lab.id, params.id);
  if (!plan) throw notFound();
  const versions = await listProtocols(db, plan.id);
  const [latest] = versions;
  const maySetUp = may(actor, "set_up_study");
  const wantsNew = new URL(request.url).searchParams.has("new");
  return {
    studyId: plan.id,
    studyName: plan.name,
    versions: versions.map((version) => ({
      id: version.id,
      number: version.number,
      note: version.note,
      by: version.createdByName,
      at: version.createdAt,
      lines: describeChoices(readChoices(version.choices)),
    })),
    maySetUp,
    /** The form begins with the latest version's choices. */
    form:
      maySetUp && (wantsNew || !latest)
        ? {
            basedOn: latest ? { id: latest.id, number: latest.number } : null,
            fields: fieldsOfChoices(latest ? readChoices(latest.choices) : defaultChoices),
          }
        : null,
  };
}

export async function action({ request, context, params }: Route.ActionArgs) {
  const { actor, lab } = await requireActor(request, context, "set_up_study");
  const desk = context.get(deskContext);
  const plan = await findStudyPlan(desk.store.db, lab.id, params.id);
  if (!plan) throw notFound();
  const form = await request.formData();
  const fields: ProtocolFields = Object.fromEntries(
    [...form].filter((entry): entry is [string, string] => typeof entry[1] === "string"),
  );
  const [latest] = await listProtocols(desk.store.db, plan.id);
  const read = readProtocolFields(fields, latest ? readChoices(latest.choices) : defaultChoices);
  if (read.status === "invalid") {
    return data({ fields, problems: read.problems }, { status: 400 });
  }
  const added = await addProtocol(desk, actor, {
    studyId: plan.id,
    basedOnProtocolId: fields.basedOn || null,
    choices: read.choices,
    note: fields.note ?? "",
  });
  switch (added.status) {
    case "added":
      return redirect(`/studies/${plan.id}/protocols`);
    case "unchanged": {
      const sentence = `Version ${added.number} says the same: change a choice first.`;
      return data({ fields, problems: [{ field: "", sentence }] }, { status: 400 });
    }
    case "stale":
      return data({ fields, problems: [{ field: "", sentence: added.sentence }] }, { status: 409 });
  }
}

/** A refusal because of somebody else's change shows that change: what stands now is read again. */
export function shouldRevalidate({
  actionStatus,
  defaultShouldRevalidate,
}: ShouldRevalidateFunctionArgs): boolean {
  return actionStatus === 409 || defaultShouldRevalidate;
}

export default function Protocols({ loaderData, actionData }: Route.ComponentProps) {
  const { studyId, studyName, versions, form, maySetUp } = loaderData;
  const isFirst = versions.length === 0;
  return (
    <>
      <PageHead
        actions={
          maySetUp && !form ? (
            <ButtonLink look="do" to="?new">
              Make a new version
            </ButtonLink>
          ) : null
        }
        facts={isFirst ? [] : [countOf(versions.length, "version"), "a used version never changes"]}
        title={`Protocols of ${studyName}`}
      />
      {isFirst ? (
        <Empty
          text={
            maySetUp
              ? "Every choice that turns a recording into K, B and I will stand here, version by version. State the first one before anyone looks at conditions."
              : "Every choice that turns a recording into K, B and I will stand here. A biomechanist or a manager states the first one."
          }
        />
      ) : null}
      {form ? (
        <ProtocolForm
          basedOn={form.basedOn}
          fields={actionData?.fields ?? form.fields}
          isFirst={isFirst}
          key={form.basedOn?.id}
          problems={actionData?.problems ?? []}
          studyId={studyId}
        />
      ) : null}
      {versions.map((version, place) => (
        <details className="border-b border-rule py-2" key={version.id} open={place === 0 && !form}>
          <summary className="min-h-6">
            <span className="font-semibold">Version {version.number}</span>
            <span className="text-ink-2">
              , {version.by}, <span className="num">{formatMoment(version.at)}</span>
            </span>
          </summary>
          {version.note ? <p className="mt-1 max-w-prose">{version.note}</p> : null}
          <ChoiceLines lines={version.lines} />
        </details>
      ))}
      <div className="mt-8">
        <Cautions length="full" />
      </div>
    </>
  );
}

function ChoiceLines({ lines }: { lines: DescribedChoice[] }) {
  return (
    <dl className="mt-2 grid max-w-3xl grid-cols-1 gap-x-6 sm:grid-cols-[12rem_1fr]">
      {lines.map((line) => (
        <div className="contents" key={line.label}>
          <dt className="pt-1 text-ink-2 sm:border-t sm:border-rule sm:pb-1">{line.label}</dt>
          <dd className="border-b border-rule pb-1 sm:border-t sm:border-b-0 sm:pt-1">
            {line.value}
          </dd>
        </div>
      ))}
    </dl>
  );
}

function ProtocolForm({
  studyId,
  basedOn,
  fields,
  problems,
  isFirst,
}: {
  studyId: string;
  basedOn: { id: string; number: number } | null;
  fields: ProtocolFields;
  problems: { field: string; sentence: string }[];
  isFirst: boolean;
}) {
  const isBusy = useNavigation().state === "submitting";
  const errorOf = (field: string) =>
    problems.find((problem) => problem.field === field)?.sentence ?? null;
  // A rule over a span (its end before its start) is said beside the end.
  const errorOfNumber = (name: string) =>
    errorOf(name) ?? (name.endsWith("_ms.1") ? errorOf(name.slice(0, -2)) : null);
  const named = new Set<string>();
  const number = (name: string, label: string, unit?: string, hint?: string) => {
    named.add(name);
    return (
      <TextField
        className="num max-w-24"
        defaultValue={fields[name]}
        error={errorOfNumber(name)}
        hint={hint}
        inputMode="decimal"
        label={label}
        name={name}
        unit={unit}
      />
    );
  };
  const tick = (name: string, label: ReactNode, hint?: string) => {
    named.add(name);
    return (
      <CheckField
        defaultChecked={fields[name] === "on"}
        error={errorOf(name)}
        hint={hint}
        label={label}
        name={name}
        value="on"
      />
    );
  };

  return (
    <Form
      aria-label="A new version of the protocol"
      className="mb-6 max-w-5xl border-b border-rule pb-6"
      method="post"
      noValidate
    >
      {problems.length > 0 ? (
        <Notice urgent>
          {countOf(problems.length, "choice is", "choices are")} not right yet; the sentence stands
          beside each. Nothing was saved.
        </Notice>
      ) : null}
      <input name="basedOn" type="hidden" value={fields.basedOn ?? basedOn?.id ?? ""} />
      <p className="mb-2 text-ink-2">
        {basedOn === null
          ? "The fields begin with usual values; change what your rig and joint ask for."
          : `The fields begin as version ${basedOn.number} has them. Fits that were made with it keep it.`}
      </p>

      <Part title="Perturbation">
        <SelectField
          defaultValue={fields["onset.from"]}
          error={errorOf("onset.from")}
          label="Onset found from"
          name="onset.from"
          options={[
            { value: "angle", label: "the angle’s velocity" },
            { value: "trigger", label: "a trigger column" },
          ]}
        />
        {number(
          "onset.expected_amplitude_deg",
          "Expected amplitude",
          "°",
          "Others are set aside as of the wrong size. Empty: not checked.",
        )}
        {number(
          "onset.expected_duration_ms",
          "Expected duration",
          "ms",
          "Together with the amplitude.",
        )}
        {number("onset.min_separation_ms", "Least time between onsets", "ms")}
        {number("onset.cutoff_hz", "Cut-off for finding onsets", "Hz")}
      </Part>

      <Part title="Window">
        {number("baseline_ms.0", "Baseline from", "ms", "From onset; negative is before it.")}
        {number("baseline_ms.1", "Baseline to", "ms")}
        {number("window_ms.0", "Window from", "ms")}
        {number("window_ms.1", "Window to", "ms")}
        {number(
          "reflex_limit_ms",
          "Reflex limit",
          "ms",
          "When reflex torque can begin: about 35 at the wrist, 50 at the ankle. A window that reaches past it is flagged.",
        )}
      </Part>

      <Part title="Filter and derivatives">
        <SelectField
          defaultValue={fields.filter}
          error={errorOf("filter")}
          hint="One filter for angle and torque, forwards and backwards."
          label="Low-pass"
          name="filter"
          options={[
            { value: "butterworth", label: "Butterworth" },
            { value: "none", label: "none" },
          ]}
        />
        {number("filter.cutoff_hz", "Cut-off", "Hz", "−3 dB after one pass.")}
        {number("filter.order", "Order of one pass")}
        <div className="lg:col-start-1">
          <SelectField
            defaultValue={fields.derivative}
            error={errorOf("derivative")}
            label="Before the differences"
            name="derivative"
            options={[
              { value: "central", label: "no smoothing" },
              { value: "savitzky_golay", label: "Savitzky–Golay" },
            ]}
          />
        </div>
        {number(
          "derivative.savitzky_golay.polynomial",
          "Its polynomial",
          undefined,
          "2 to 5; only with smoothing.",
        )}
        {number("derivative.savitzky_golay.span_ms", "Its span", "ms")}
      </Part>

      <Part title="Model">
        <fieldset className="sm:col-span-full">
          <legend className="mb-1">Torque from these terms</legend>
          <div className="flex flex-wrap gap-x-6">
            {TERMS.map((term) => (
              <div key={term}>
                {tick(
                  `model.terms.${term}`,
                  <>
                    <TermLetter term={term} /> {TERM_NAMES[term]}
                  </>,
                )}
              </div>
            ))}
            {tick("model.nonnegative", "no free term below 0")}
          </div>
          <FieldError error={errorOf("model.terms")} />
        </fieldset>
        {TERMS.map((term) => (
          <div key={term}>
            {number(`model.fixed.${term}`, `${term} fixed at`, TERM_UNITS[term], "Empty: fitted.")}
          </div>
        ))}
      </Part>

      <Part title="Checks">
        {number("background.target", "Background torque aimed at", "N·m", "Empty: no target.")}
        {number("background.tolerance", "Its tolerance", "N·m")}
        {number("lag_ms", "Delay of the torque", "ms", "0: none corrected.")}
        {number(
          "max_filled_samples",
          "Missing samples filled, at most",
          undefined,
          "0: never filled.",
        )}
        <TextField
          className="num"
          defaultValue={fields["robustness.window_end_ms"]}
          error={problems.find((p) => p.field.startsWith("robustness.window_end_ms"))?.sentence}
          hint="Each fit is made again with these, to show how far K, B and I move."
          label="Window ends also tried"
          name="robustness.window_end_ms"
          unit="ms"
        />
        <TextField
          className="num"
          defaultValue={fields["robustness.cutoff_hz"]}
          error={problems.find((p) => p.field.startsWith("robustness.cutoff_hz"))?.sentence}
          hint="With a space between them, like 20 50 100."
          label="Cut-offs also tried"
          name="robustness.cutoff_hz"
          unit="Hz"
        />
      </Part>

      <div className="mt-4 max-w-prose">
        <TextAreaField
          defaultValue={fields.note}
          hint="Why this version was made; it stands beside it for good."
          label="Note"
          maxLength={1000}
          name="note"
          rows={2}
        />
      </div>
      <OtherProblems named={named} problems={problems} />
      <div className="mt-4 flex flex-wrap items-center gap-2">
        <Button busy={isBusy} busyLabel="Saving" look="do">
          {isFirst ? "Save version 1" : `Save version ${(basedOn?.number ?? 0) + 1}`}
        </Button>
        {isFirst ? null : (
          <Link
            className="link inline-flex min-h-6 items-center px-2"
            to={`/studies/${studyId}/protocols`}
          >
            Leave it as it is
          </Link>
        )}
      </div>
    </Form>
  );
}

/** What no field above stands for (a rule over two fields, say) is still said. */
function OtherProblems({
  named,
  problems,
}: {
  named: ReadonlySet<string>;
  problems: { field: string; sentence: string }[];
}) {
  const shownElsewhere = [
    "onset.from",
    "filter",
    "derivative",
    "model.terms",
    "baseline_ms",
    "window_ms",
  ];
  const others = problems.filter(
    ({ field }) =>
      !named.has(field) && !shownElsewhere.includes(field) && !field.startsWith("robustness."),
  );
  return others.map((problem) => <FieldError error={problem.sentence} key={problem.field} />);
}

function Part({ title, children }: { title: string; children: ReactNode }) {
  return (
    <fieldset className="border-t border-rule pt-3 pb-4">
      <legend className="float-left mb-2 w-full font-semibold">{title}</legend>
      <div className="clear-both grid grid-cols-1 items-start gap-x-6 gap-y-3 sm:grid-cols-2 lg:grid-cols-4">
        {children}
      </div>
    </fieldset>
  );
}

export function ErrorBoundary() {
  return <ErrorScreen />;
}
