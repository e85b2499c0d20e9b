import { data, Form, redirect } from "react-router";
import { z } from "zod";
import { deskContext, gateContext } from "#app/auth/context.server.ts";
import { ownPath } from "#app/auth/own-path.ts";
import { requirePerson } from "#app/auth/require.server.ts";
import { Button } from "#app/components/button.tsx";
import { ErrorScreen } from "#app/components/error-screen.tsx";
import { Mark } from "#app/components/mark.tsx";
import { Notice } from "#app/components/notice.tsx";
import { PlainPage } from "#app/components/plain-page.tsx";
import { listMemberships } from "#app/db/people.server.ts";
import { notFound } from "#app/domain/refusal.ts";
import type { Route } from "./+types/choose-lab.ts";

export function meta(): Route.MetaDescriptors {
  return [{ title: "Choose a lab · Ogee" }];
}

export async function loader({ request, context }: Route.LoaderArgs) {
  const { person, labId } = await requirePerson(request, context);
  const memberships = await listMemberships(context.get(deskContext).store.db, person.id);
  return {
    person: { name: person.name, email: person.email },
    labs: memberships.map(({ lab, roles }) => ({ ...lab, roles, isCurrent: lab.id === labId })),
  };
}

const form = z.object({ lab: z.string().min(1) });

export async function action({ request, context, url }: Route.ActionArgs) {
  const { person } = await requirePerson(request, context);
  const parsed = form.safeParse(Object.fromEntries(await request.formData()));
  if (!parsed.success) {
    return data({ error: "Choose one of the labs below." }, { status: 400 });
  }
  const memberships = await listMemberships(context.get(deskContext).store.db, person.id);
  const chosen = memberships.find(({ lab }) => lab.id === parsed.data.lab);
  if (chosen === undefined) throw notFound();
  const { sessions } = context.get(gateContext);
  const session = await sessions.getSession(request.headers.get("Cookie"));
  session.set("labId", chosen.lab.id);
  return redirect(ownPath(url.searchParams.get("to")), {
    headers: { "Set-Cookie": await sessions.commitSession(session) },
  });
}

export default function ChooseLab({ loaderData, actionData }: Route.ComponentProps) {
  const { person, labs } = loaderData;
  return (
    <PlainPage>
      <h1 className="mb-4">{labs.length === 0 ? "No lab yet" : "Choose a lab"}</h1>
      {actionData?.error ? <Notice urgent>{actionData.error}</Notice> : null}
      {labs.length === 0 ? (
        <p>
          {person.email} is in no lab at present. The manager of your lab can add you; then load
          this page again.
        </p>
      ) : (
        <Form method="post">
          <ul className="border-t border-rule">
            {labs.map((lab) => (
              <li className="border-b border-rule" key={lab.id}>
                <button
                  aria-current={lab.isCurrent || undefined}
                  className="flex w-full items-center justify-between gap-3 px-1 py-3 text-left hover:bg-hover"
                  name="lab"
                  type="submit"
                  value={lab.id}
                >
                  <span>
                    <span className="block font-semibold">{lab.name}</span>
                    <span className="block text-sm text-ink-2">{lab.roles.join(", ")}</span>
                  </span>
                  {lab.isCurrent ? (
                    <span className="flex items-center gap-2 text-sm text-ink-2">
                      <Mark size="place" />
                      you are here
                    </span>
                  ) : null}
                </button>
              </li>
            ))}
          </ul>
        </Form>
      )}
      <Form action="/sign-out" className="mt-6 flex items-center gap-3" method="post">
        <span className="text-sm text-ink-2">Signed in as {person.name}</span>
        <Button look="quiet">Sign out</Button>
      </Form>
    </PlainPage>
  );
}

export function ErrorBoundary() {
  return (
    <PlainPage>
      <ErrorScreen />
    </PlainPage>
  );
}
