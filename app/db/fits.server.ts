import { and, asc, desc, eq, isNull, max, sql } from "drizzle-orm";
import type { FitState, SavedWindow, Verification } from "#app/domain/fit.ts";
import { type ProtocolChoices, protocolChoicesSchema, type VisitGeometry } from "#app/domain/protocol.ts";
import type { RecordingFacts, RecordingMap } from "#app/domain/recording.ts";
import { notFound } from "#app/domain/refusal.ts";
import type { Impedance, Result } from "#app/engine/types.ts";
import type { Reader, Transaction } from "./client.server.ts";
import { placeColumns, type RecordingPlace, readFacts, readMap } from "./recordings.server.ts";
import { listReviews, type ListedReview } from "./reviews.server.ts";
import {
  conditions,
  fits,
  fitWindows,
  participants,
  people,
  postures,
  protocols,
  recordings,
  rigs,
  studies,
  studyAxes,
  visits,
} from "./schema.ts";

export type FitRow = typeof fits.$inferSelect;
export type FitWindowRow = typeof fitWindows.$inferSelect;
