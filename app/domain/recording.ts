import { z } from "zod";
import { UNITS } from "#app/engine/types.ts";

/** Which columns of a file are what: kept with the recording, signs resolved for the tested side. */

const unit = z.enum(UNITS);
const channel = z.strictObject({
  column: z.string().min(1),
  unit,
  gain: z.number().refine((value) => value !== 0, "A gain of 0 would erase the channel."),
  offset: z.number(),
  sign: z.literal([1, -1]),
});
export type ChannelMap = z.infer<typeof channel>;

const table = z.strictObject({
  separator: z.enum(["auto", ",", ";", "\t", "|", " "]),
  decimal: z.enum(["auto", ".", ","]),
  header_row: z.union([z.literal("auto"), z.int().min(1)]),
});

const time = z.union([
  z.strictObject({ column: z.string().min(1), unit: z.enum(["s", "ms", "us"]) }),
  z.strictObject({ rate_hz: z.number().positive() }),
]);

export const recordingMapSchema = z.strictObject({
  table,
  time,
  axes: z
    .array(
      z.strictObject({
        /** Name of one of the study's axes. */
        name: z.string().min(1),
        angle: channel,
        torque: channel,
        limb_angle: channel.optional(),
      }),
    )
    .min(1)
    .max(2),
  trigger: z.string().nullable(),
  emg: z.array(
    z.strictObject({
      muscle: z.string().min(1),
      column: z.string().min(1),
      unit: z.enum(["V", "mV", "uV"]),
    }),
  ),
});
export type RecordingMap = z.infer<typeof recordingMapSchema>;

/** What the reader saw in the stored file. */
export const recordingFactsSchema = z.strictObject({
  samples: z.int(),
  rateHz: z.number(),
  durationS: z.number(),
  gaps: z.int(),
  duplicates: z.int(),
  missing: z.int(),
  flags: z.array(z.strictObject({ code: z.string(), text: z.string() })),
});
export type RecordingFacts = z.infer<typeof recordingFactsSchema>;

/** The seven states of a cell, the least advanced first. */
export const CELL_STATES = [
  "nothing",
  "recorded",
  "windowed",
  "draft",
  "submitted",
  "returned",
  "approved",
] as const;
export type CellState = (typeof CELL_STATES)[number];
