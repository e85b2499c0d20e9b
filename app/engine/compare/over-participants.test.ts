import { describe, expect, it } from "vitest";
import { meanOverParticipants } from "./over-participants.ts";

describe("mean over participants", () => {
  // Student (1908), "The probable error of a mean", Biometrika 6: 1–25: hours of sleep gained by ten
  // patients, second column. R's t.test(extra ~ 1, sleep, group == 2): 0.8976775 to 3.7623225.
  it("has the t interval of Student's own data, as R's t.test gives it, to 1e-6", () => {
    const gained = [1.9, 0.8, 1.1, 0.1, -0.1, 4.4, 5.5, 1.6, 4.6, 3.4];
    const { n, mean, sd, interval } = meanOverParticipants(gained);
    expect(n).toBe(10);
    expect(mean).toBeCloseTo(2.33, 10);
    expect(sd).toBeCloseTo(2.0022, 4);
    expect(interval?.[0]).toBeCloseTo(0.8976775, 6);
    expect(interval?.[1]).toBeCloseTo(3.7623225, 6);
  });

  it("leaves out participants without a value and says how many stand behind it", () => {
    expect(meanOverParticipants([2, null, 4])).toMatchObject({ n: 2, mean: 3 });
  });

  it("has no interval for one participant, and no mean for none", () => {
    expect(meanOverParticipants([3, null])).toEqual({ n: 1, mean: 3, sd: null, interval: null });
    expect(meanOverParticipants([null])).toEqual({ n: 0, mean: null, sd: null, interval: null });
  });

  it("has an interval without width where all are the same", () => {
    expect(meanOverParticipants([3, 3, 3]).interval).toEqual([3, 3]);
  });
});
