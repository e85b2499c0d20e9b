import { describe, expect, it } from "vitest";
import { participantSchema, studySetUpSchema } from "./study.ts";
import { participantOfFields, studyOfFields } from "./study-form.ts";

const TYPED = {
  name: "Wrist wraps",
  rigName: "Seated wrist rig",
  axes: [{ name: "FE", label: "flexion–extension", positive: "extension", negative: "flexion" }],
  conditions: [
    { name: "bare", level: "0", levelUnit: "turns", isBaseline: "on" },
    { name: "tight, grip", level: "", levelUnit: "", isActive: "on" },
  ],
  postures: [{ name: "seated" }],
  participants: [{ code: "W01", testedSide: "left", bodyMassKg: "59,5", heightM: "" }],
};

describe("a set-up as typed", () => {
  it("becomes a study: ticks, decimal commas and what may stay empty", () => {
    const study = studySetUpSchema.parse(studyOfFields(TYPED));
    expect(study.rig).toEqual({ name: "Seated wrist rig" });
    expect(study.conditions[0]).toMatchObject({ level: 0, isBaseline: true, isActive: false });
    expect(study.conditions[1]).toMatchObject({ level: null, levelUnit: null, isActive: true });
    expect(study.participants[0]).toMatchObject({ bodyMassKg: 59.5, heightM: null });
  });

  it("names the field of each problem", () => {
    const read = studySetUpSchema.safeParse(
      studyOfFields({
        ...TYPED,
        axes: [{ ...TYPED.axes[0], negative: "" }],
        participants: [{ ...TYPED.participants[0], bodyMassKg: "much" }],
      }),
    );
    expect(read.error?.issues.map((issue) => issue.path.join("."))).toEqual(
      expect.arrayContaining(["axes.0.negative", "participants.0.bodyMassKg"]),
    );
  });

  it("is refused as a whole where nothing was sent, not broken", () => {
    expect(studySetUpSchema.safeParse(studyOfFields(undefined)).success).toBe(false);
    expect(studySetUpSchema.safeParse(studyOfFields({ axes: "no list" })).success).toBe(false);
  });

  it("takes a participant's side only as chosen", () => {
    const read = participantSchema.safeParse(participantOfFields({ code: "W01" }));
    expect(read.error?.issues[0]?.path).toEqual(["testedSide"]);
  });
});
