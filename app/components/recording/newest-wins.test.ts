import { describe, expect, it } from "vitest";
import { newestWins } from "./newest-wins.ts";

/** A sender whose answers are given by hand, in order. */
function byHand() {
  const asked: number[] = [];
  const settle: ((ok: boolean) => void)[] = [];
  const send = (question: number) => {
    asked.push(question);
    return new Promise<number>((resolve, reject) =>
      settle.push((ok) => (ok ? resolve(question * 10) : reject(new Error("no answer")))),
    );
  };
  const next = async (ok = true) => {
    settle.shift()?.(ok);
    await new Promise((resolve) => setTimeout(resolve, 0));
  };
  return { asked, send, next };
}

describe("one question in flight, the newest wins", () => {
  it("skips what was asked in between", async () => {
    const { asked, send, next } = byHand();
    const answers: number[] = [];
    const ask = newestWins(
      send,
      (answer) => answers.push(answer),
      () => {},
      "show",
    );
    for (const question of [1, 2, 3, 4]) ask(question);
    await next();
    await next();
    expect(asked).toEqual([1, 4]);
    expect(answers).toEqual([10, 40]);
  });

  it("drops an answer that a newer question has overtaken, where asked to", async () => {
    const { send, next } = byHand();
    const answers: number[] = [];
    const ask = newestWins(
      send,
      (answer) => answers.push(answer),
      () => {},
      "drop",
    );
    ask(1);
    ask(2);
    await next();
    await next();
    expect(answers).toEqual([20]);
  });

  it("goes on after a failure, and says it", async () => {
    const { send, next } = byHand();
    const heard: unknown[] = [];
    const ask = newestWins(
      send,
      (answer) => heard.push(answer),
      (error) => heard.push((error as Error).message),
      "show",
    );
    ask(1);
    ask(2);
    await next(false);
    await next();
    expect(heard).toEqual(["no answer", 20]);
  });
});
