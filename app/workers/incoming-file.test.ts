import { describe, expect, it } from "vitest";
import { makeAxis, makeProtocol } from "../../tests/support/made-signals.ts";
import { lookAtHead, readWhole } from "./incoming-file.ts";

const AUTO = { separator: "auto", decimal: "auto", header_row: "auto" } as const;
const FE = { name: "FE", label: "flexion–extension" };

/** 1 s at rest, a step of 4 degrees down over 50 ms, and 1 s there; a spring of 3 N·m/rad. */
function recording(torqueSign: 1 | -1): string {
  const lines = ["Made by a test", "t;ang_fe;trq_fe", "ms;deg;N.m"];
  for (let i = 0; i < 2050; i += 1) {
    const degrees = -4 * Math.min(1, Math.max(0, (i - 1000) / 50));
    const torque = torqueSign * 3 * degrees * (Math.PI / 180);
    lines.push([i, degrees.toFixed(4), torque.toFixed(4)].join(";").replaceAll(".", ","));
  }
  return `${lines.join("\r\n")}\r\n`;
}

const protocol = makeProtocol({
  time: { column: "t", unit: "ms" },
  axes: [
    makeAxis("FE", {
      positive: "extension",
      negative: "flexion",
      angle: { column: "ang_fe", unit: "deg", gain: 1, offset: 0, sign: 1 },
      torque: { column: "trq_fe", unit: "N.m", gain: 1, offset: 0, sign: 1 },
    }),
  ],
});

describe("a glance at a file", () => {
  it("shows layout, names, units and first rows, and proposes what each column is", async () => {
    const head = await lookAtHead(new Blob([recording(1)]), AUTO, [FE]);
    if (head.status !== "read") throw new Error(head.sentence);
    expect(head.preview.dialect).toMatchObject({ separator: ";", decimal: ",", headerLine: 2 });
    expect(head.preview.preamble).toEqual(["Made by a test"]);
    expect(head.preview.units).toEqual(["ms", "deg", "N.m"]);
    expect(head.proposed.time).toMatchObject({ column: "t", unit: "ms" });
    expect(head.proposed.axes[0]).toMatchObject({
      angle: { column: "ang_fe", unit: "deg" },
      torque: { column: "trq_fe", unit: "N.m" },
    });
  });

  it("reads no more than the head of a large file", async () => {
    const file = new Blob([recording(1), "1;2;3;4;5\r\n".repeat(100_000)]);
    const slice = file.slice.bind(file);
    const asked: number[] = [];
    file.slice = (start, end, type) => {
      asked.push(end ?? Number.POSITIVE_INFINITY);
      return slice(start, end, type);
    };
    file.arrayBuffer = () => Promise.reject(new Error("The whole file was read."));
    expect((await lookAtHead(file, AUTO, [FE])).status).toBe("read");
    expect(asked).toEqual([256 * 1024]);
  });

  it("refuses what holds no table in one sentence", async () => {
    const head = await lookAtHead(new Blob(["nothing here\n"]), AUTO, [FE]);
    expect(head).toMatchObject({ status: "refused" });
  });
});

describe("a whole file", () => {
  it("tells when and how far the first movement went, and what the torque does", async () => {
    const read = await readWhole(new Blob([recording(1)]), protocol);
    if (read.status !== "read") throw new Error(read.sentence);
    expect(read.facts).toMatchObject({ samples: 2050, gaps: 0, missing: 0 });
    const [movement] = read.movements;
    if (movement?.status !== "moved") throw new Error("The axis moved.");
    expect(movement.onsetS).toBeCloseTo(1, 1);
    expect(movement.amplitudeDeg).toBeCloseTo(-4, 6);
    expect(movement.torqueSign).toBe(1);
  });

  it("sees a torque that falls as the angle grows", async () => {
    const read = await readWhole(new Blob([recording(-1)]), protocol);
    expect(read).toMatchObject({ movements: [{ torqueSign: -1 }] });
  });

  it("says that nothing moved where nothing did", async () => {
    const rest = `t,ang_fe,trq_fe\n${Array.from({ length: 100 }, (_, i) => `${i},0,0`).join("\n")}\n`;
    const read = await readWhole(new Blob([rest]), protocol);
    expect(read).toMatchObject({ movements: [{ axis: "FE", status: "still" }] });
  });

  it("refuses a row with a cell too few, with its line", async () => {
    const lines = recording(1).split("\r\n");
    lines[700] = "697;0,0";
    const read = await readWhole(new Blob([lines.join("\r\n")]), protocol);
    expect(read).toMatchObject({ status: "refused", line: 701 });
  });
});
