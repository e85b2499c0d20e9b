import { background } from "./background.server.ts";
import type { Desk } from "./desk.server.ts";
import { endForgottenUploads } from "./open-upload.server.ts";
import { resumeVerifications } from "./take-in-recording.server.ts";
import { resumeSecondLooks } from "./verify-fit.server.ts";

/**
 * Takes up what an earlier run left unfinished, and what failed since: for the start and for every
 * few minutes after it. What waits or runs already is not begun again.
 */
export async function resumeWork(desk: Desk): Promise<void> {
  await resumeVerifications(desk);
  await resumeSecondLooks(desk);
  await endForgottenUploads(desk);
}

/** Lets the job under way end and begins no other. */
export function stopWork(): Promise<void> {
  return background.close();
}
