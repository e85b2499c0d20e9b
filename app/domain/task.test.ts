import { describe, expect, it } from "vitest";
import { listTasks, type StudyProgress } from "./task.ts";

const STUDY: StudyProgress = {
  id: "s1",
  name: "Wrist wraps",
  participants: 6,
  conditions: 5,
  protocols: 1,
  recordings: 29,
  fits: { draft: 2, submitted: 3, returned: 1, approved: 20 },
};
const NONE = new Map<string, number>();

describe("what waits for a person", () => {
  it("is for a biomechanist what came back, the drafts, and the recordings without a fit", () => {
    const tasks = listTasks({ roles: ["biomechanist"] }, [STUDY], NONE);
    expect(tasks.map((task) => [task.kind, task.count])).toEqual([
      ["returned", 1],
      ["draft", 2],
      ["no_fit", 3],
    ]);
  });

  it("is for a reviewer only what they may decide on", () => {
    expect(listTasks({ roles: ["reviewer"] }, [STUDY], NONE)).toEqual([]);
    const tasks = listTasks({ roles: ["reviewer"] }, [STUDY], new Map([["s1", 2]]));
    expect(tasks).toEqual([{ kind: "review", count: 2, studyId: "s1", studyName: "Wrist wraps" }]);
  });

  it("is for who sets studies up what a study lacks", () => {
    const bare = { ...STUDY, participants: 0, protocols: 0, recordings: 0 };
    const tasks = listTasks({ roles: ["manager"] }, [{ ...bare, fits: { ...STUDY.fits } }], NONE);
    expect(tasks.map((task) => task.kind)).toEqual(["no_protocol", "no_participants"]);
  });

  it("is nothing for an analyst", () => {
    expect(listTasks({ roles: ["analyst"] }, [STUDY], new Map([["s1", 2]]))).toEqual([]);
  });
});
