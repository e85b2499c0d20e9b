import { useEffect, useRef } from "react";
import { data, Form, redirect, useNavigation } from "react-router";
import { gateContext, remoteAddressContext } from "#app/auth/context.server.ts";
import { ownPath } from "#app/auth/own-path.ts";
import { findPerson } from "#app/auth/require.server.ts";
import { SignInRefusal } from "#app/auth/sign-in.server.ts";
import { Button } from "#app/components/button.tsx";
import { Cautions } from "#app/components/cautions.tsx";
import { ErrorScreen } from "#app/components/error-screen.tsx";
import { TextField } from "#app/components/field.tsx";
import { Notice } from "#app/components/notice.tsx";
import { PlainPage } from "#app/components/plain-page.tsx";
import type { Route } from "./+types/sign-in.ts";

export function meta(): Route.MetaDescriptors {
  return [{ title: "Sign in · Ogee" }];
}

export async function loader({ request, context, url }: Route.LoaderArgs) {
  const to = ownPath(url.searchParams.get("to"));
  if ((await findPerson(request, context)) !== null) throw redirect(to);
  return { isSecondFactorOff: context.get(gateContext).isSecondFactorOff };
}

export async function action({ request, context, url }: Route.ActionArgs) {
  const { sessions, signIn } = context.get(gateContext);
  try {
    const { personId, labId } = await signIn(request, context.get(remoteAddressContext));
    const to = ownPath(url.searchParams.get("to"));
    // A session that was there before ends: its token may be known to somebody else.
    await sessions.destroySession(await sessions.getSession(request.headers.get("Cookie")));
    const session = await sessions.getSession();
    session.set("personId", personId);
    session.set("labId", labId);
    return redirect(labId === null ? `/choose-lab?${new URLSearchParams({ to })}` : to, {
      headers: { "Set-Cookie": await sessions.commitSession(session) },
    });
  } catch (refusal) {
    if (!(refusal instanceof SignInRefusal)) throw refusal;
    const { errors, email, status, waitS } = refusal;
    const headers: HeadersInit = waitS === null ? {} : { "Retry-After": String(waitS) };
    return data({ errors, email }, { status, headers });
  }
}

export default function SignIn({ loaderData, actionData }: Route.ComponentProps) {
  const isSending = useNavigation().formMethod === "POST";
  const errors = actionData?.errors;
  const form = useRef<HTMLFormElement>(null);
  // Without a script the page loads anew, and `autoFocus` does the same.
  useEffect(() => {
    if (!actionData) return;
    const place = actionData.errors.email === undefined ? "password" : "email";
    form.current?.querySelector<HTMLInputElement>(`[name=${place}]`)?.focus();
  }, [actionData]);

  return (
    <PlainPage>
      <h1 className="mb-4">Sign in</h1>
      {errors?.form ? <Notice urgent>{errors.form}</Notice> : null}
      <Form className="flex flex-col gap-4" method="post" noValidate ref={form}>
        <TextField
          autoCapitalize="none"
          autoComplete="username"
          autoFocus={!errors || errors.email !== undefined}
          defaultValue={actionData?.email}
          error={errors?.email ?? null}
          inputMode="email"
          label="E-mail address"
          name="email"
          required
          spellCheck={false}
          type="email"
        />
        <TextField
          autoComplete="current-password"
          autoFocus={errors !== undefined && errors.email === undefined}
          error={errors?.password ?? null}
          label="Password"
          name="password"
          required
          type="password"
        />
        <div>
          <Button busy={isSending} busyLabel="Signing in" look="do">
            Sign in
          </Button>
        </div>
      </Form>
      <p className="mt-6 text-sm text-ink-2">Whoever runs Ogee in your lab gives out accounts.</p>
      {loaderData.isSecondFactorOff ? (
        <p className="mt-2 border-l-2 border-ink pl-2 text-sm">
          This is a demo on this machine: its accounts sign in without a second factor.
        </p>
      ) : null}
      <div className="mt-10 border-t border-rule pt-4">
        <Cautions />
      </div>
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
