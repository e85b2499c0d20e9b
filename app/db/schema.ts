/**
 * Every table. Ids are random text, times are milliseconds since 1970 (UTC), documents are JSON
 * text. Large arrays are never here: they are objects in storage.
 */
import { sql } from "drizzle-orm";
import {
  check,
  index,
  integer,
  primaryKey,
  real,
  sqliteTable,
  text,
  uniqueIndex,
} from "drizzle-orm/sqlite-core";
import type { Role } from "#app/domain/role.ts";

const id = () => text("id").primaryKey();
const createdAt = () => integer("created_at").notNull();
/** Grows by one with each change; an update names the version that it saw. */
const version = () => integer("version").notNull().default(1);

// ---------------------------------------------------------------- labs and people

export const labs = sqliteTable("labs", {
  id: id(),
  name: text("name").notNull(),
  createdAt: createdAt(),
});

export const people = sqliteTable(
  "people",
  {
    id: id(),
    /** Trimmed and in lower case. */
    email: text("email").notNull(),
    name: text("name").notNull(),
    /** argon2id, PHC string. */
    passwordHash: text("password_hash").notNull(),
    createdAt: createdAt(),
  },
  (t) => [uniqueIndex("people_email").on(t.email)],
);

export const memberships = sqliteTable(
  "memberships",
  {
    id: id(),
    labId: text("lab_id")
      .notNull()
      .references(() => labs.id),
    personId: text("person_id")
      .notNull()
      .references(() => people.id),
    createdAt: createdAt(),
    endedAt: integer("ended_at"),
  },
  (t) => [
    uniqueIndex("memberships_lab_person").on(t.labId, t.personId),
    index("memberships_person").on(t.personId),
  ],
);

export const membershipRoles = sqliteTable(
  "membership_roles",
  {
    membershipId: text("membership_id")
      .notNull()
      .references(() => memberships.id),
    role: text("role").$type<Role>().notNull(),
  },
  (t) => [
    primaryKey({ columns: [t.membershipId, t.role] }),
    check(
      "membership_roles_role",
      sql`${t.role} in ('biomechanist', 'analyst', 'reviewer', 'manager')`,
    ),
  ],
);

export const sessions = sqliteTable(
  "sessions",
  {
    /** SHA-256 of the token in the cookie: a copy of the database opens no session. */
    id: id(),
    personId: text("person_id").references(() => people.id),
    /** The lab that the person works in now. */
    labId: text("lab_id").references(() => labs.id),
    data: text("data").notNull().default("{}"),
    createdAt: createdAt(),
    lastSeenAt: integer("last_seen_at").notNull(),
    /** Absolute limit; sliding expiry is counted from `lastSeenAt`. */
    expiresAt: integer("expires_at").notNull(),
    revokedAt: integer("revoked_at"),
  },
  (t) => [index("sessions_person").on(t.personId)],
);

// ---------------------------------------------------------------- what a lab owns

export const rigs = sqliteTable(
  "rigs",
  {
    id: id(),
    labId: text("lab_id")
      .notNull()
      .references(() => labs.id),
    name: text("name").notNull(),
    /** The channel map remembered from the last take-in (RigMap), or null. */
    channelMap: text("channel_map"),
    /** The rig's own K, B, I by axis, from empty-rig recordings; null where not measured. */
    impedance: text("impedance"),
    /** Limits that the rig keeps: { torqueNm, velocityDegPerS }, or null. */
    limits: text("limits"),
    version: version(),
    createdAt: createdAt(),
  },
  (t) => [uniqueIndex("rigs_lab_name").on(t.labId, t.name)],
);

export const studies = sqliteTable(
  "studies",
  {
    id: id(),
    labId: text("lab_id")
      .notNull()
      .references(() => labs.id),
    name: text("name").notNull(),
    /** Said wherever the study's numbers stand: "invented" for the demo, else null. */
    origin: text("origin"),
    rigId: text("rig_id").references(() => rigs.id),
    /** Pattern that reads participant, condition, posture and axis from a file's name. */
    fileNamePattern: text("file_name_pattern"),
    version: version(),
    createdAt: createdAt(),
  },
  (t) => [uniqueIndex("studies_lab_name").on(t.labId, t.name)],
);

export const studyAxes = sqliteTable(
  "study_axes",
  {
    id: id(),
    studyId: text("study_id")
      .notNull()
      .references(() => studies.id),
    /** Short name as in PROTOCOL ("FE"). */
    name: text("name").notNull(),
    /** In words ("flexion–extension"). */
    label: text("label").notNull(),
    positive: text("positive").notNull(),
    negative: text("negative").notNull(),
    position: integer("position").notNull(),
  },
  (t) => [uniqueIndex("study_axes_name").on(t.studyId, t.name)],
);

export const conditions = sqliteTable(
  "conditions",
  {
    id: id(),
    studyId: text("study_id")
      .notNull()
      .references(() => studies.id),
    name: text("name").notNull(),
    position: integer("position").notNull(),
    level: real("level"),
    levelUnit: text("level_unit"),
    isBaseline: integer("is_baseline", { mode: "boolean" }).notNull().default(false),
    isActive: integer("is_active", { mode: "boolean" }).notNull().default(false),
  },
  (t) => [uniqueIndex("conditions_name").on(t.studyId, t.name)],
);

export const postures = sqliteTable(
  "postures",
  {
    id: id(),
    studyId: text("study_id")
      .notNull()
      .references(() => studies.id),
    name: text("name").notNull(),
    position: integer("position").notNull(),
  },
  (t) => [uniqueIndex("postures_name").on(t.studyId, t.name)],
);

export const participants = sqliteTable(
  "participants",
  {
    id: id(),
    studyId: text("study_id")
      .notNull()
      .references(() => studies.id),
    /** Pseudonymous ("W07"). */
    code: text("code").notNull(),
    testedSide: text("tested_side").$type<"left" | "right">().notNull(),
    bodyMassKg: real("body_mass_kg"),
    heightM: real("height_m"),
    version: version(),
    createdAt: createdAt(),
  },
  (t) => [
    uniqueIndex("participants_code").on(t.studyId, t.code),
    check("participants_side", sql`${t.testedSide} in ('left', 'right')`),
  ],
);

export const visits = sqliteTable(
  "visits",
  {
    id: id(),
    participantId: text("participant_id")
      .notNull()
      .references(() => participants.id),
    rigId: text("rig_id")
      .notNull()
      .references(() => rigs.id),
    /** Calendar day, ISO 8601. */
    day: text("day").notNull(),
    /** Geometry of the day, e.g. { jointToPlateM: [x, y, z] }; "{}" where none is needed. */
    geometry: text("geometry").notNull().default("{}"),
    version: version(),
    createdAt: createdAt(),
  },
  (t) => [uniqueIndex("visits_participant_day").on(t.participantId, t.rigId, t.day)],
);

/** A used version never changes: rows are inserted, never updated. */
export const protocols = sqliteTable(
  "protocols",
  {
    id: id(),
    studyId: text("study_id")
      .notNull()
      .references(() => studies.id),
    /** 1, 2, 3 … within a study. */
    number: integer("number").notNull(),
    kind: text("kind").$type<"transient">().notNull(),
    /** The study's choices (ProtocolChoices), JSON with sorted keys. */
    choices: text("choices").notNull(),
    /** Why this version was made, in a person's words. */
    note: text("note").notNull().default(""),
    createdBy: text("created_by")
      .notNull()
      .references(() => people.id),
    createdAt: createdAt(),
  },
  (t) => [uniqueIndex("protocols_number").on(t.studyId, t.number)],
);

// ---------------------------------------------------------------- recordings

export const uploads = sqliteTable(
  "uploads",
  {
    id: id(),
    labId: text("lab_id")
      .notNull()
      .references(() => labs.id),
    studyId: text("study_id")
      .notNull()
      .references(() => studies.id),
    personId: text("person_id")
      .notNull()
      .references(() => people.id),
    fileName: text("file_name").notNull(),
    sizeBytes: integer("size_bytes").notNull(),
    /** As hashed in the browser; the server hashes the stored copy again. */
    sha256: text("sha256").notNull(),
    /** `incoming/<upload>` in storage. */
    storageKey: text("storage_key").notNull(),
    /** The storage's own id of a multipart upload, or null for one part. */
    multipartId: text("multipart_id"),
    state: text("state").$type<"open" | "finished" | "cancelled" | "refused">().notNull(),
    createdAt: createdAt(),
    endedAt: integer("ended_at"),
  },
  (t) => [index("uploads_person").on(t.personId, t.state)],
);

export const recordings = sqliteTable(
  "recordings",
  {
    id: id(),
    labId: text("lab_id")
      .notNull()
      .references(() => labs.id),
    studyId: text("study_id")
      .notNull()
      .references(() => studies.id),
    participantId: text("participant_id")
      .notNull()
      .references(() => participants.id),
    conditionId: text("condition_id")
      .notNull()
      .references(() => conditions.id),
    postureId: text("posture_id")
      .notNull()
      .references(() => postures.id),
    visitId: text("visit_id")
      .notNull()
      .references(() => visits.id),
    kind: text("kind").$type<"transient">().notNull(),
    fileName: text("file_name").notNull(),
    sizeBytes: integer("size_bytes").notNull(),
    sha256: text("sha256").notNull(),
    /** `raw/<lab>/<sha256>` in storage: written by the server alone. */
    storageKey: text("storage_key").notNull(),
    /** Ready only when size and hash of the stored copy are verified. */
    state: text("state").$type<"verifying" | "ready" | "refused">().notNull(),
    /** Why it was refused, in a sentence. */
    refusal: text("refusal"),
    /** RecordingMap as resolved for the tested side, JSON with sorted keys. */
    channelMap: text("channel_map").notNull(),
    /** What the reader saw: samples, rateHz, durationS, gaps, duplicates, missing, flags. Null until read. */
    facts: text("facts"),
    takenInBy: text("taken_in_by")
      .notNull()
      .references(() => people.id),
    takenInAt: integer("taken_in_at").notNull(),
    version: version(),
  },
  (t) => [
    uniqueIndex("recordings_lab_sha256").on(t.labId, t.sha256),
    index("recordings_study").on(t.studyId),
    index("recordings_cell").on(t.participantId, t.conditionId),
  ],
);

// ---------------------------------------------------------------- fits

/** One recording × one protocol version, all its axes. Superseded, never overwritten. */
export const fits = sqliteTable(
  "fits",
  {
    id: id(),
    labId: text("lab_id")
      .notNull()
      .references(() => labs.id),
    recordingId: text("recording_id")
      .notNull()
      .references(() => recordings.id),
    protocolId: text("protocol_id")
      .notNull()
      .references(() => protocols.id),
    /** 1, 2, 3 … within a recording. */
    number: integer("number").notNull(),
    state: text("state").$type<"draft" | "submitted" | "returned" | "approved">().notNull(),
    verification: text("verification").$type<"unverified" | "verified" | "differs">().notNull(),
    /** Where the server's numbers differ: which key, and by how much. */
    verificationNote: text("verification_note"),
    /** PROTOCOL of the headless command, byte for byte as exported. */
    protocolDocument: text("protocol_document").notNull(),
    protocolSha256: text("protocol_sha256").notNull(),
    /** RESULT of the headless command for this one recording, full double precision. */
    result: text("result").notNull(),
    engine: text("engine").notNull(),
    savedBy: text("saved_by")
      .notNull()
      .references(() => people.id),
    savedAt: integer("saved_at").notNull(),
    /** The fit that took this one's place; null while current. */
    supersededBy: text("superseded_by"),
    supersededAt: integer("superseded_at"),
    version: version(),
  },
  (t) => [
    uniqueIndex("fits_number").on(t.recordingId, t.number),
    uniqueIndex("fits_current").on(t.recordingId).where(sql`${t.supersededAt} is null`),
    index("fits_state").on(t.labId, t.state),
    check("fits_state_word", sql`${t.state} in ('draft', 'submitted', 'returned', 'approved')`),
  ],
);

export const fitWindows = sqliteTable(
  "fit_windows",
  {
    fitId: text("fit_id")
      .notNull()
      .references(() => fits.id),
    position: integer("position").notNull(),
    axis: text("axis").notNull(),
    onsetS: real("onset_s").notNull(),
    windowStartMs: real("window_start_ms").notNull(),
    windowEndMs: real("window_end_ms").notNull(),
    included: integer("included", { mode: "boolean" }).notNull(),
    reason: text("reason"),
    /** How the window came to be, and who changed it last; null for one as the engine found it. */
    origin: text("origin").$type<"found" | "by_hand">().notNull(),
    editedBy: text("edited_by").references(() => people.id),
    editedAt: integer("edited_at"),
  },
  (t) => [primaryKey({ columns: [t.fitId, t.position] })],
);

export const reviews = sqliteTable(
  "reviews",
  {
    id: id(),
    fitId: text("fit_id")
      .notNull()
      .references(() => fits.id),
    reviewerId: text("reviewer_id")
      .notNull()
      .references(() => people.id),
    decision: text("decision").$type<"approved" | "returned">().notNull(),
    note: text("note").notNull().default(""),
    decidedAt: integer("decided_at").notNull(),
  },
  (t) => [index("reviews_fit").on(t.fitId)],
);

// ---------------------------------------------------------------- events

/** Who did what, when; append-only (triggers refuse update and delete). One hash chain over all rows. */
export const events = sqliteTable(
  "events",
  {
    sequence: integer("sequence").primaryKey({ autoIncrement: true }),
    at: integer("at").notNull(),
    labId: text("lab_id").references(() => labs.id),
    personId: text("person_id").references(() => people.id),
    /** "fit.saved", "recording.opened" … */
    kind: text("kind").notNull(),
    objectType: text("object_type").notNull(),
    objectId: text("object_id").notNull(),
    /** JSON with sorted keys. */
    detail: text("detail").notNull(),
    /** SHA-256 over the previous row's hash and this row's values. */
    hash: text("hash").notNull(),
  },
  (t) => [
    uniqueIndex("events_hash").on(t.hash),
    index("events_lab").on(t.labId, t.sequence),
    index("events_object").on(t.objectType, t.objectId, t.kind),
  ],
);
