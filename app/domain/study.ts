import { z } from "zod";

/** What a study is set up with, and the sentences for what does not fit. */

function name(what: string, most: number) {
  return z
    .string()
    .trim()
    .min(1, `${what} is missing.`)
    .max(most, `${what} has at most ${most} characters.`);
}

export const studyNameSchema = name("The study's name", 120);
export const rigNameSchema = name("The rig's name", 80);

export const axisSchema = z
  .strictObject({
    /** Short, as in the protocol ("FE"). */
    name: name("The axis's short name", 12),
    /** In words ("flexion–extension"). */
    label: name("The axis's name in words", 60),
    positive: name("The positive direction", 40),
    negative: name("The negative direction", 40),
  })
  .refine((axis) => axis.positive !== axis.negative, {
    message: "The two directions of an axis need different names.",
    path: ["negative"],
  });
export type NewAxis = z.infer<typeof axisSchema>;

export const conditionSchema = z
  .strictObject({
    name: name("The condition's name", 60),
    /** For slopes over the level ("20" kPa); null where there is none. */
    level: z.number("The level is not a number.").nullable(),
    levelUnit: name("The level's unit", 20).nullable(),
    isBaseline: z.boolean(),
    isActive: z.boolean(),
  })
  .refine((condition) => (condition.level === null) === (condition.levelUnit === null), {
    message: "A level and its unit come together: give both or neither.",
    path: ["levelUnit"],
  });
export type NewCondition = z.infer<typeof conditionSchema>;

export const postureSchema = z.strictObject({ name: name("The posture's name", 60) });
export type NewPosture = z.infer<typeof postureSchema>;

export const participantSchema = z.strictObject({
  /** A code, never a name: it stands on every figure and in every export. */
  code: z
    .string()
    .trim()
    .regex(
      /^[\p{L}\p{N}][\p{L}\p{N}._-]{0,19}$/u,
      "A participant's code has up to 20 letters and digits, without spaces, for example W07.",
    ),
  testedSide: z.enum(["left", "right"], "Say which side is tested: left or right."),
  bodyMassKg: z
    .number("The body mass is not a number.")
    .min(1, "The body mass is in kg.")
    .max(400, "The body mass is in kg, at most 400.")
    .nullable(),
  heightM: z
    .number("The height is not a number.")
    .min(0.3, "The height is in m.")
    .max(2.6, "The height is in m, for example 1.74.")
    .nullable(),
});
export type NewParticipant = z.infer<typeof participantSchema>;

export const studySetUpSchema = z
  .strictObject({
    name: studyNameSchema,
    /** One of the lab's rigs, or the name of a new one. */
    rig: z.union([z.strictObject({ id: z.string() }), z.strictObject({ name: rigNameSchema })]),
    axes: z.array(axisSchema).min(1, "A study has at least one axis."),
    conditions: z.array(conditionSchema).min(1, "A study has at least one condition."),
    postures: z.array(postureSchema).min(1, "A study has at least one posture."),
    participants: z.array(participantSchema),
  })
  .superRefine((study, context) => {
    const problem = (path: (string | number)[], message: string) =>
      context.addIssue({ code: "custom", path, message });
    const once = (list: "axes" | "conditions" | "postures", what: string) => {
      const names = study[list].map((part) => part.name);
      names.forEach((each, index) => {
        if (names.indexOf(each) < index) {
          problem([list, index, "name"], `Two ${what} are called ${each}.`);
        }
      });
    };
    once("axes", "axes");
    once("conditions", "conditions");
    once("postures", "postures");
    const codes = study.participants.map((participant) => participant.code);
    codes.forEach((code, index) => {
      if (codes.indexOf(code) < index) {
        problem(["participants", index, "code"], `Two participants have the code ${code}.`);
      }
    });
    if (study.conditions.filter((condition) => condition.isBaseline).length > 1) {
      const second = study.conditions.findLastIndex((condition) => condition.isBaseline);
      problem(["conditions", second, "isBaseline"], "Only one condition can be the baseline.");
    }
  });
export type StudySetUp = z.infer<typeof studySetUpSchema>;
