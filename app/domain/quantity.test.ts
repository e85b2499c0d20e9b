import { describe, expect, it } from "vitest";
import {
  columnDecimals,
  countOf,
  formatBytes,
  formatChange,
  formatDay,
  formatDigits,
  formatFull,
  formatMoment,
  formatNumber,
  halfWidth,
  scaleOf,
  supportedDecimals,
} from "./quantity.ts";

describe("how a number is written", () => {
  it("has a true minus and never a negative zero", () => {
    expect(formatNumber(-2.345, 2)).toBe("−2.35");
    expect(formatNumber(-0.0001, 2)).toBe("0.00");
  });

  it("is a dash where it is undefined, never 0", () => {
    expect(formatNumber(null, 2)).toBe("–");
    expect(formatNumber(Number.NaN, 2)).toBe("–");
    expect(formatDigits(undefined, 3)).toBe("–");
    expect(formatFull(null)).toBe("not determined");
  });

  it("carries its sign where it is a change", () => {
    expect(formatChange(0.22, 2)).toBe("+0.22");
    expect(formatChange(-0.22, 2)).toBe("−0.22");
    expect(formatChange(0.001, 2)).toBe("0.00");
  });

  it("shows significant digits without an exponent", () => {
    expect(formatDigits(0.0044321, 2)).toBe("0.0044");
    expect(formatDigits(61.27, 2)).toBe("61");
    expect(formatDigits(1e-20, 2)).toBe("0.000000000000");
  });

  it("keeps every digit for the title", () => {
    expect(formatFull(4.638271903)).toBe("4.638271903");
  });
});

describe("rounding to what the interval supports", () => {
  it("gives the half-width two significant digits and the value the same decimals", () => {
    expect(supportedDecimals(4.638, 0.2314)).toBe(2);
    expect(supportedDecimals(45.31, 12.1)).toBe(0);
    expect(supportedDecimals(3.1412, 0.0312)).toBe(3);
  });

  it("does not gain a digit where the half-width rounds up to a power of ten", () => {
    expect(supportedDecimals(4.6, 0.0996)).toBe(2);
  });

  it("shows three significant digits where there is no interval", () => {
    expect(supportedDecimals(0.0044321, null)).toBe(5);
    expect(supportedDecimals(4.638, null)).toBe(2);
  });

  it("gives a column one count of decimals, at most one more than its widest interval supports", () => {
    expect(
      columnDecimals([
        { value: 4.6, half: 0.23 },
        { value: 2.1, half: 0.0041 },
        { value: 7.9, half: 1.2 },
      ]),
    ).toBe(2);
    expect(columnDecimals([{ value: null, half: null }])).toBe(0);
  });

  it("has no half-width where a bound is missing", () => {
    expect(halfWidth(null)).toBeNull();
    expect(halfWidth([Number.NaN, 2])).toBeNull();
    expect(halfWidth([4.41, 4.87])).toBeCloseTo(0.23, 12);
  });
});

describe("units", () => {
  it("goes to thousandths where every value of the column is below 0.3", () => {
    expect(scaleOf("I", [0.00315, null, 0.00301])).toEqual({ factor: 1000, unit: "10⁻³ kg·m²" });
    expect(scaleOf("B", [0.05, 0.6])).toEqual({ factor: 1, unit: "N·m·s/rad" });
    expect(scaleOf("K", [])).toEqual({ factor: 1, unit: "N·m/rad" });
  });
});

describe("bytes, days and counts", () => {
  it("are written as a person says them", () => {
    expect(formatBytes(812)).toBe("812 B");
    expect(formatBytes(12_400_000)).toBe("12.4 MB");
    expect(formatDay(Date.UTC(2026, 9, 14))).toBe("14 Oct 2026");
    expect(formatMoment(Date.UTC(2026, 9, 4, 9, 5))).toBe("4 Oct 2026, 09:05 UTC");
    expect(countOf(1, "window")).toBe("1 window");
    expect(countOf(3, "study", "studies")).toBe("3 studies");
  });
});
