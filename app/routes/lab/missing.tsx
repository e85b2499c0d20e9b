import { requireActor } from "#app/auth/require.server.ts";
import { ErrorScreen } from "#app/components/error-screen.tsx";
import { notFound } from "#app/domain/refusal.ts";
import type { Route } from "./+types/missing.ts";

/** Every address that nothing else answers. Who is not signed in learns no more than the sign-in page. */
export async function loader({ request, context }: Route.LoaderArgs) {
  await requireActor(request, context);
  throw notFound();
}

export default function Missing() {
  return null;
}

export function ErrorBoundary() {
  return <ErrorScreen />;
}
