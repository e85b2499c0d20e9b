import { and, desc, eq, inArray } from "drizzle-orm";
import { HAPPENING_KINDS, type Happening, type HappeningKind } from "#app/domain/happening.ts";
import type { Reader } from "./client.server.ts";
import { listRecordingPlaces } from "./recordings.server.ts";
import { events, people, studies } from "./schema.ts";

/** Events that a page looks back over. */
const LOOK_BACK = 200;

/** The last things that happened to a lab's studies, recordings and fits, the newest first. */
export async function listHappenings(db: Reader, labId: string): Promise<Happening[]> {
  const rows = await db
    .select({
      sequence: events.sequence,
      at: events.at,
      kind: events.kind,
      objectId: events.objectId,
      detail: events.detail,
      personName: people.name,
    })
    .from(events)
    .leftJoin(people, eq(people.id, events.personId))
    .where(and(eq(events.labId, labId), inArray(events.kind, [...HAPPENING_KINDS])))
    .orderBy(desc(events.sequence))
    .limit(LOOK_BACK);

  const told = rows.map((row) => ({ ...row, ...objectsOf(row.kind, row.objectId, row.detail) }));
  const recordingIds = new Set(told.flatMap((row) => row.recordingId ?? []));
  const [found, named] = await Promise.all([
    listRecordingPlaces(db, labId, [...recordingIds]),
    db.select({ id: studies.id, name: studies.name }).from(studies).where(eq(studies.labId, labId)),
  ]);
  const places = new Map(found.map((place) => [place.recordingId, place]));
  return told.flatMap((row) => {
    const kind = HAPPENING_KINDS.find((one) => one === row.kind);
    const place = row.recordingId === null ? undefined : places.get(row.recordingId);
    const studyId = place?.studyId ?? row.studyId;
    const study = named.find((one) => one.id === studyId);
    if (!kind || !study) return [];
    return [
      {
        sequence: row.sequence,
        at: row.at,
        kind,
        personName: row.personName,
        study,
        about: place ? `${place.participantCode}, ${place.conditionName}` : null,
        href: hrefOf(kind, row.objectId, study.id),
      },
    ];
  });
}

function objectsOf(
  kind: string,
  objectId: string,
  detailText: string,
): { recordingId: string | null; studyId: string | null } {
  const detail: unknown = JSON.parse(detailText);
  const inDetail = (key: string): string | null => {
    const value =
      typeof detail === "object" && detail !== null
        ? (detail as Record<string, unknown>)[key]
        : undefined;
    return typeof value === "string" ? value : null;
  };
  if (kind === "study.created") return { recordingId: null, studyId: objectId };
  if (kind.startsWith("recording.")) return { recordingId: objectId, studyId: null };
  return { recordingId: inDetail("recordingId"), studyId: inDetail("studyId") };
}

function hrefOf(kind: HappeningKind, objectId: string, studyId: string): string {
  if (kind.startsWith("fit.")) return `/fits/${objectId}`;
  if (kind.startsWith("recording.")) return `/recordings/${objectId}`;
  return kind === "protocol.added" ? `/studies/${studyId}/protocols` : `/studies/${studyId}`;
}
