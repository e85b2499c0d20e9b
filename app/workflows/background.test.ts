import { describe, expect, it } from "vitest";
import { createBackground } from "./background.server.ts";

function gate() {
  let open = () => {};
  const opened = new Promise<void>((resolve) => {
    open = resolve;
  });
  return { open, opened };
}

describe("background work", () => {
  it("runs one job at a time, and what a person watches first", async () => {
    const background = createBackground(() => {});
    const held = gate();
    const ran: string[] = [];
    void background.add("a", async () => {
      await held.opened;
      ran.push("a");
    });
    void background.add("b", async () => void ran.push("b"));
    void background.add("c", async () => void ran.push("c"), "first");
    expect(ran).toEqual([]);
    held.open();
    await background.settled();
    expect(ran).toEqual(["a", "c", "b"]);
  });

  it("does not queue a key twice, and tells when that key has ended", async () => {
    const background = createBackground(() => {});
    let runs = 0;
    void background.add("a", async () => void runs++);
    await background.add("a", async () => void runs++);
    expect(runs).toBe(1);
    await background.add("a", async () => void runs++);
    expect(runs).toBe(2);
    await background.ended("a");
  });

  it("reports a job that fails and goes on with the next", async () => {
    const failures: string[] = [];
    const background = createBackground((key, error) => failures.push(`${key}: ${error}`));
    let hasRun = false;
    void background.add("a", () => Promise.reject(new Error("no storage")));
    await background.add("b", async () => {
      hasRun = true;
    });
    expect(failures).toEqual(["a: Error: no storage"]);
    expect(hasRun).toBe(true);
  });

  it("drops what waits when it closes, after the job under way", async () => {
    const background = createBackground(() => {});
    const held = gate();
    const ran: string[] = [];
    void background.add("a", async () => {
      await held.opened;
      ran.push("a");
    });
    const waiting = background.add("b", async () => void ran.push("b"));
    const closed = background.close();
    await waiting;
    held.open();
    await closed;
    await background.add("c", async () => void ran.push("c"));
    expect(ran).toEqual(["a"]);
  });
});
