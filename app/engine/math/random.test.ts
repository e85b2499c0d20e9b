import { describe, expect, it } from "vitest";
import { seededRandom, splitMix64, xoshiro128 } from "#app/engine/math/random.ts";

describe("the seeded generator", () => {
  // Outputs of the authors' xoshiro128starstar.c (version 1.1) from the state 1, 2, 3, 4.
  it("is xoshiro128** as published", () => {
    const random = xoshiro128(1, 2, 3, 4);
    const outputs = Array.from({ length: 10 }, () => random.nextUint32());
    expect(outputs).toEqual([
      11520, 0, 5927040, 70819200, 2031721883, 1637235492, 1287239034, 3734860849, 3729100597,
      4258142804,
    ]);
  });

  // Outputs of the authors' splitmix64.c from the seed 1477776061723855037.
  it("fills its state by SplitMix64 as published", () => {
    expect(splitMix64(1477776061723855037n, 3)).toEqual([
      1985237415132408290n,
      2979275885539914483n,
      13511426838097143398n,
    ]);
  });

  // A second program (Python, whole-number arithmetic) of the two published algorithms.
  it.each([
    [1, [1695105466, 1423115009, 634581793, 1068227753, 716759206]],
    [0, [3737715805, 2584255861, 2876756834, 3286328325, 1553311962]],
    [-1, [477689756, 2493998634, 555695776, 607808419, 61340979]],
    [Number.MAX_SAFE_INTEGER, [1233166643, 1287031142, 661813442, 2960669951, 2601079046]],
  ])("gives the same sequence for seed %i wherever it runs", (seed, expected) => {
    const random = seededRandom(seed);
    expect(expected.map(() => random.nextUint32())).toEqual(expected);
  });

  it("draws each of n equally often, within what chance allows", () => {
    const random = seededRandom(7);
    const draws = 70_000;
    const counts = new Array<number>(7).fill(0);
    for (let i = 0; i < draws; i++) {
      const k = random.nextInt(7);
      counts[k] = (counts[k] ?? 0) + 1;
    }
    const expected = draws / 7;
    const chiSquare = counts.reduce((sum, count) => sum + (count - expected) ** 2 / expected, 0);
    // 0.999 quantile of χ² with 6 degrees of freedom.
    expect(chiSquare).toBeLessThan(22.458);
  });

  it("throws the incomplete run away where n does not divide 2³²", () => {
    // 2³¹ + 1 leaves all values from 2³¹ + 1 on, half of them, to be drawn again.
    const plain = seededRandom(3);
    const random = seededRandom(3);
    const n = 2 ** 31 + 1;
    for (let i = 0; i < 200; i++) {
      let value = plain.nextUint32();
      while (value >= n) value = plain.nextUint32();
      expect(random.nextInt(n)).toBe(value);
    }
  });

  it("refuses a seed or a number of choices that is no whole number, and a state of zeros", () => {
    expect(() => seededRandom(0.5)).toThrow(RangeError);
    expect(() => seededRandom(2 ** 53)).toThrow(RangeError);
    for (const n of [0, -1, 1.5, 2 ** 32 + 1]) {
      expect(() => seededRandom(1).nextInt(n)).toThrow(RangeError);
    }
    expect(() => xoshiro128(0, 0, 0, 0)).toThrow(RangeError);
    expect(seededRandom(1).nextInt(1)).toBe(0);
  });
});
