import { and, desc, eq, lt } from "drizzle-orm";
import type { Reader, Transaction } from "./client.server.ts";
import { uploads } from "./schema.ts";

export type UploadRow = typeof uploads.$inferSelect;

export async function findUpload(
  db: Reader,
  labId: string,
  uploadId: string,
): Promise<UploadRow | null> {
  const [row] = await db
    .select()
    .from(uploads)
    .where(and(eq(uploads.id, uploadId), eq(uploads.labId, labId)));
  return row ?? null;
}

export async function insertUpload(
  tx: Transaction,
  row: typeof uploads.$inferInsert,
): Promise<void> {
  await tx.insert(uploads).values(row);
}

/** @returns false where the upload is no longer in the state `from`, and stays as it is */
export async function endUpload(
  tx: Transaction,
  uploadId: string,
  from: UploadRow["state"],
  to: "finished" | "cancelled" | "refused",
  endedAt: number,
): Promise<boolean> {
  const ended = await tx
    .update(uploads)
    .set({ state: to, endedAt })
    .where(and(eq(uploads.id, uploadId), eq(uploads.state, from)))
    .returning({ id: uploads.id });
  return ended.length > 0;
}

/** The upload that the bytes of a recording came with, the newest where several did. */
export async function findFinishedUpload(
  db: Reader,
  labId: string,
  sha256: string,
): Promise<UploadRow | null> {
  const [row] = await db
    .select()
    .from(uploads)
    .where(and(eq(uploads.labId, labId), eq(uploads.sha256, sha256), eq(uploads.state, "finished")))
    .orderBy(desc(uploads.endedAt))
    .limit(1);
  return row ?? null;
}

/** Uploads of all labs that were opened before this time and never ended. */
export function listForgottenUploads(db: Reader, openedBefore: number): Promise<UploadRow[]> {
  return db
    .select()
    .from(uploads)
    .where(and(eq(uploads.state, "open"), lt(uploads.createdAt, openedBefore)));
}
