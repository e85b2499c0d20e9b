import { describe, expect, it } from "vitest";
import { defaultChoices } from "#app/domain/protocol.ts";
import { type RigMap, rememberMap } from "#app/domain/rig-map.ts";
import type { FileHead, FileReading, ProposedMap } from "#app/engine/types.ts";
import {
  addFiles,
  type Batch,
  type BatchFile,
  changeMap,
  confirmAxis,
  findFile,
  giveOwnMap,
  mapOf,
  nameWarning,
  nextJob,
  readingOf,
  setHash,
  setHead,
  setHeld,
  setPattern,
  setPlace,
  setReading,
  setSending,
  setTable,
  shareMapAgain,
  sharersOf,
  standingOf,
  standingOfAll,
  startBatch,
  type TakeInStudy,
} from "./batch.ts";
import { recordingMapOf, turnMovement, turnTorque } from "./map-draft.ts";

const AUTO = { separator: "auto", decimal: "auto", header_row: "auto" } as const;

const study: TakeInStudy = {
  rigMap: null,
  axes: [{ name: "FE", label: "flexion–extension", positive: "extension", negative: "flexion" }],
  conditions: [
    { id: "c1", name: "bare" },
    { id: "c2", name: "firm" },
  ],
  postures: [{ id: "s1", name: "seated" }],
  participants: [
    { id: "p1", code: "W01", testedSide: "right" },
    { id: "p2", code: "W02", testedSide: "left" },
  ],
  choices: defaultChoices,
  fileNamePattern: null,
  lastDay: "2026-12-02",
};

const PROPOSED: ProposedMap = {
  time: { column: "t", unit: "ms", certain: true },
  axes: [
    {
      name: "FE",
      angle: { column: "ang", unit: "deg", certain: true },
      torque: { column: "trq", unit: "N.m", certain: true },
      limbAngle: null,
    },
  ],
  trigger: null,
  emg: [],
};

function head(header = ["t", "ang", "trq"], proposed = PROPOSED): FileHead {
  return {
    status: "read",
    preview: {
      dialect: {
        encoding: "utf-8",
        separator: ",",
        decimal: ".",
        headerLine: 1,
        unitsLine: null,
      },
      header,
      units: header.map(() => ""),
      rows: [],
      preamble: [],
      flags: [],
    },
    proposed,
  };
}

function whole(torqueSign: 1 | -1 = 1): FileReading {
  return {
    status: "read",
    facts: {
      samples: 1000,
      rateHz: 1000,
      durationS: 1,
      gaps: 0,
      duplicates: 0,
      missing: 0,
      flags: [],
    },
    movements: [{ axis: "FE", status: "moved", onsetS: 1.2, amplitudeDeg: 4, torqueSign }],
  };
}

function withFiles(names: string[], of: TakeInStudy = study, pattern: string | null = null): Batch {
  return addFiles(
    startBatch(pattern),
    of,
    names.map((name) => ({ id: name, name, sizeBytes: 100, day: "2026-10-05" })),
  );
}

function get(batch: Batch, id: string): BatchFile {
  const file = findFile(batch, id);
  if (!file) throw new Error(`The batch has no file ${id}.`);
  return file;
}

/** Everything that the worker finds out about a file. */
function readAll(batch: Batch, id: string, result: FileReading = whole(), of = study): Batch {
  const seen = setHash(setHead(batch, of, id, head()), id, { status: "read", sha256: id });
  const wanted = readingOf(seen, of, get(seen, id));
  if (!wanted) throw new Error("The map has gaps.");
  return setReading(seen, id, wanted.key, result);
}

const standing = (batch: Batch, id: string, of = study) => standingOf(batch, of, get(batch, id));

describe("where a file belongs", () => {
  it("is proposed from its name, and from the study where there is only one choice", () => {
    const { place } = get(withFiles(["w01_firm_a.csv"]), "w01_firm_a.csv");
    expect(place).toEqual({
      participantId: "p1",
      conditionId: "c2",
      postureId: "s1",
      day: "2026-10-05",
    });
  });

  it("follows a changed pattern, except where a person has chosen", () => {
    const batch = withFiles(["w01_w02_bare.csv"]);
    expect(get(batch, "w01_w02_bare.csv").place.participantId).toBe("");
    const read = setPattern(batch, study, "{any}_{participant}_{condition}");
    expect(get(read, "w01_w02_bare.csv").place).toMatchObject({
      participantId: "p2",
      conditionId: "c1",
    });
    const chosen = setPlace(read, ["w01_w02_bare.csv"], { participantId: "p1" });
    const again = setPattern(chosen, study, "{any}_{participant}_{any}");
    expect(get(again, "w01_w02_bare.csv").place).toMatchObject({
      participantId: "p1",
      conditionId: "",
    });
  });

  it("is warned of where the name seems to tell who was recorded", () => {
    expect(nameWarning(study, "AnnaSmith_bare.csv")).toMatch(/AnnaSmith/);
    expect(nameWarning(study, "w01_bare.csv")).toBeNull();
  });
});

describe("a map", () => {
  it("is shared by files with the same columns until one gets its own", () => {
    const names = ["w01_bare.csv", "w01_firm.csv", "other.csv"];
    let batch = withFiles(names);
    batch = setHead(batch, study, "w01_bare.csv", head());
    batch = setHead(batch, study, "w01_firm.csv", head());
    batch = setHead(batch, study, "other.csv", head(["t", "ang", "trq", "x"]));
    expect(sharersOf(batch, study, get(batch, "w01_bare.csv")).map(({ id }) => id)).toEqual([
      "w01_firm.csv",
    ]);

    batch = changeMap(batch, study, "w01_bare.csv", (map) => ({ ...map, timeUnit: "s" }));
    const unitOf = (id: string) => mapOf(batch, study, get(batch, id))?.timeUnit;
    expect(names.map(unitOf)).toEqual(["s", "s", "ms"]);

    batch = giveOwnMap(batch, study, "w01_firm.csv");
    batch = changeMap(batch, study, "w01_firm.csv", (map) => ({ ...map, timeUnit: "us" }));
    expect(names.map(unitOf)).toEqual(["s", "us", "ms"]);
    expect(sharersOf(batch, study, get(batch, "w01_bare.csv"))).toEqual([]);

    batch = shareMapAgain(batch, "w01_firm.csv");
    expect(names.map(unitOf)).toEqual(["s", "s", "ms"]);
  });

  it("comes from the rig where its columns stand in the file, else from the columns", () => {
    let batch = withFiles(["w01_bare.csv"]);
    batch = setHead(batch, study, "w01_bare.csv", head());
    const made = mapOf(batch, study, get(batch, "w01_bare.csv"));
    if (!made) throw new Error("There is a map.");
    const rigMap: RigMap = rememberMap(
      null,
      recordingMapOf(turnMovement(made, "FE", "right"), AUTO, "right"),
      "right",
    );
    const known = { ...study, rigMap };
    const fits = setHead(withFiles(["a.csv"], known), known, "a.csv", head());
    expect(mapOf(fits, known, get(fits, "a.csv"))?.from).toBe("rig");
    const header = ["time", "ang", "trq"];
    const misfits = setHead(withFiles(["a.csv"], known), known, "a.csv", head(header));
    expect(mapOf(misfits, known, get(misfits, "a.csv"))?.from).toBe("columns");
  });

  it("is tried with the layout that the rig remembers, and without it where that fails", () => {
    const table = { ...AUTO, header_row: 7 };
    const map = {
      table,
      time: { rate_hz: 1000 },
      axes: [],
      trigger: null,
      emg: [],
    };
    const known = { ...study, rigMap: map };
    const batch = withFiles(["a.csv"], known);
    expect(nextJob(batch, known, null)).toMatchObject({ kind: "head", table });
    const refused = { status: "refused", sentence: "No.", line: 7 } as const;
    const second = setHead(batch, known, "a.csv", refused);
    expect(nextJob(second, known, null)).toMatchObject({ kind: "head", table: AUTO });
    const chosen = setTable(batch, ["a.csv"], table);
    expect(standing(setHead(chosen, known, "a.csv", refused), "a.csv", known).kind).toBe("refused");
  });
});

describe("what is read next", () => {
  it("is a glance at every file, then the chosen file whole, then hashes, then the others", () => {
    const order: string[] = [];
    let batch = withFiles(["w01_bare.csv", "w01_firm.csv"]);
    for (;;) {
      const job = nextJob(batch, study, "w01_firm.csv");
      if (!job) break;
      order.push(`${job.kind} ${job.id}`);
      if (job.kind === "head") batch = setHead(batch, study, job.id, head());
      if (job.kind === "hash")
        batch = setHash(batch, job.id, { status: "read", sha256: `hash of ${job.id}` });
      if (job.kind === "read") batch = setReading(batch, job.id, job.key, whole());
    }
    expect(order).toEqual([
      "head w01_bare.csv",
      "head w01_firm.csv",
      "read w01_firm.csv",
      "hash w01_bare.csv",
      "hash w01_firm.csv",
      "read w01_bare.csv",
    ]);
  });

  it("looks for the one axis that a file's name tells of", () => {
    const rud = {
      name: "RUD",
      label: "radial–ulnar deviation",
      positive: "ulnar deviation",
      negative: "radial deviation",
    };
    const both = { ...study, axes: [...study.axes, rud] };
    const axesOf = (name: string) => {
      const job = nextJob(withFiles([name], both), both, null);
      return job?.kind === "head" ? job.axes.map((axis) => axis.name) : [];
    };
    expect(axesOf("w01_bare_rud.csv")).toEqual(["RUD"]);
    expect(axesOf("w01_bare.csv")).toEqual(["FE", "RUD"]);
  });

  it("reads again where a column changes, and not where only a sign does", () => {
    let batch = readAll(withFiles(["w01_bare.csv"]), "w01_bare.csv");
    expect(nextJob(batch, study, null)).toBeNull();
    batch = changeMap(batch, study, "w01_bare.csv", (map) => turnTorque(map, "FE", "right"));
    expect(nextJob(batch, study, null)).toBeNull();
    batch = changeMap(batch, study, "w01_bare.csv", (map) => ({ ...map, timeUnit: "s" }));
    expect(nextJob(batch, study, null)?.kind).toBe("read");
  });
});

describe("how a file stands", () => {
  it("needs a person until the movement is confirmed for its side, in one file for all", () => {
    let batch = withFiles(["w01_bare.csv", "w01_firm.csv", "w02_bare.csv"]);
    for (const { id } of batch.files) batch = readAll(batch, id);
    expect(standing(batch, "w01_bare.csv")).toEqual({
      kind: "needs_you",
      wants: ["confirm the movement of flexion–extension"],
    });
    batch = confirmAxis(batch, study, "w01_bare.csv", "FE");
    expect(standing(batch, "w01_bare.csv").kind).toBe("good");
    expect(standing(batch, "w01_firm.csv").kind).toBe("good");
    // The left side turns the other way: it is asked for on its own.
    expect(standing(batch, "w02_bare.csv").kind).toBe("needs_you");
    expect(standingOfAll(batch, study).good).toEqual(["w01_bare.csv", "w01_firm.csv"]);
  });

  it("says where K would be negative, until a person has seen it in that very file", () => {
    let batch = withFiles(["w01_bare.csv", "w01_firm.csv"]);
    batch = readAll(batch, "w01_bare.csv");
    batch = readAll(batch, "w01_firm.csv", whole(-1));
    batch = confirmAxis(batch, study, "w01_bare.csv", "FE");
    expect(standing(batch, "w01_firm.csv")).toEqual({
      kind: "needs_you",
      wants: ["K would be negative about flexion–extension"],
    });
    batch = confirmAxis(batch, study, "w01_firm.csv", "FE");
    expect(standing(batch, "w01_firm.csv").kind).toBe("good");
  });

  it("asks for the participant first: signs belong to a side", () => {
    const batch = readAll(withFiles(["bare.csv"]), "bare.csv");
    expect(standing(batch, "bare.csv")).toEqual({ kind: "needs_you", wants: ["participant"] });
    expect(confirmAxis(batch, study, "bare.csv", "FE")).toBe(batch);
  });

  it("does not take a visit on a day that is still to come", () => {
    let batch = readAll(withFiles(["w01_bare.csv"]), "w01_bare.csv");
    batch = confirmAxis(batch, study, "w01_bare.csv", "FE");
    batch = setPlace(batch, ["w01_bare.csv"], { day: "2027-12-01" });
    expect(standing(batch, "w01_bare.csv").kind).toBe("needs_you");
  });

  it("names what the map lacks in few words", () => {
    const nothing: ProposedMap = { time: null, axes: [], trigger: null, emg: [] };
    const batch = setHead(withFiles(["w01_bare.csv"]), study, "w01_bare.csv", head(["a"], nothing));
    expect(standing(batch, "w01_bare.csv")).toEqual({
      kind: "needs_you",
      wants: ["time", "unit of time", "angle of flexion–extension", "torque of flexion–extension"],
    });
  });

  it("is refused with its line where the file cannot be read with the map, and holds up no other", () => {
    let batch = withFiles(["w01_bare.csv", "w01_firm.csv"]);
    batch = readAll(batch, "w01_firm.csv");
    batch = readAll(batch, "w01_bare.csv", {
      status: "refused",
      sentence: "The row has 2 cells, not 3.",
      line: 12,
    });
    batch = confirmAxis(batch, study, "w01_firm.csv", "FE");
    expect(standing(batch, "w01_bare.csv")).toEqual({
      kind: "refused",
      sentence: "Line 12: The row has 2 cells, not 3.",
    });
    expect(standingOfAll(batch, study).good).toEqual(["w01_firm.csv"]);
  });

  it("is the same as an earlier file of the list, or as a recording of the lab", () => {
    let batch = withFiles(["w01_bare.csv", "copy.csv"]);
    batch = setHash(batch, "w01_bare.csv", { status: "read", sha256: "one" });
    batch = setHash(batch, "copy.csv", { status: "read", sha256: "one" });
    expect(standing(batch, "copy.csv")).toEqual({ kind: "same", as: "w01_bare.csv" });
    const recording = {
      id: "r1",
      fileName: "old.csv",
      studyName: "S",
      participantCode: "W01",
      conditionName: "bare",
    };
    batch = setHeld(batch, [{ sha256: "one", recording }]);
    expect(standing(batch, "w01_bare.csv")).toEqual({ kind: "held", recording });
    expect(nextJob(batch, study, null)).toBeNull();
  });

  it("says how far the bytes are, alone and over all", () => {
    let batch = withFiles(["w01_bare.csv", "w01_firm.csv"]);
    batch = setSending(batch, "w01_bare.csv", { status: "sending", sentBytes: 42 });
    batch = setSending(batch, "w01_firm.csv", { status: "verifying" });
    expect(standing(batch, "w01_bare.csv")).toEqual({ kind: "sending", share: 0.42 });
    expect(standingOfAll(batch, study)).toMatchObject({
      asked: 2,
      sentBytes: 142,
      askedBytes: 200,
      underWay: ["w01_bare.csv", "w01_firm.csv"],
      // What is being verified has arrived: the server goes on by itself.
      unsent: ["w01_bare.csv"],
    });
    batch = setSending(batch, "w01_firm.csv", { status: "waiting" });
    expect(standingOfAll(batch, study)).toMatchObject({ sentBytes: 42, askedBytes: 200 });
  });

  it("cannot be changed while it is on its way", () => {
    let batch = readAll(withFiles(["w01_bare.csv"]), "w01_bare.csv");
    batch = setSending(batch, "w01_bare.csv", { status: "sending", sentBytes: 0 });
    expect(setPlace(batch, ["w01_bare.csv"], { day: "2026-01-01" }).files).toEqual(batch.files);
    expect(changeMap(batch, study, "w01_bare.csv", (map) => ({ ...map, timeUnit: "s" }))).toBe(
      batch,
    );
  });
});
