import { describe, expect, it } from "vitest";
import { dimensionOf, isUnitText, readUnit, toSi, unitsOf } from "#app/engine/math/units.ts";
import { UNITS, type Unit } from "#app/engine/types.ts";
import ucum from "../../../fixtures/reading-units/ucum.json";

describe("toSi", () => {
  it("multiplies by UCUM's factors within 1e-15 (UCUM, checked with @lhncbc/ucum-lhc 7.1.10)", () => {
    expect(ucum.to_si.map(({ unit }) => unit).sort()).toEqual([...UNITS].sort());
    for (const { unit, factor } of ucum.to_si) {
      const off = Math.abs(toSi(7.25, unit as Unit) / (7.25 * factor) - 1);
      expect(off, unit).toBeLessThanOrEqual(1e-15);
    }
  });

  it("rounds once: 9 ms are the double nearest to 0.009 s", () => {
    expect(toSi(9, "ms")).toBe(0.009);
    expect(toSi(7, "us")).toBe(0.000007);
    expect(toSi(180, "deg")).toBe(Math.PI);
  });
});

describe("dimensions", () => {
  it("hold each unit once", () => {
    const dimensions = [...new Set(UNITS.map(dimensionOf))];
    expect(dimensions.flatMap(unitsOf).sort()).toEqual([...UNITS].sort());
    expect(unitsOf("torque")).toEqual(["N.m", "N.mm", "N.cm", "kN.m"]);
  });
});

describe("readUnit", () => {
  it("takes each code for itself, in brackets too", () => {
    for (const unit of UNITS) {
      expect(readUnit(unit)).toBe(unit);
      expect(readUnit(` [ ${unit} ] `)).toBe(unit);
      expect(readUnit(`(${unit})`)).toBe(unit);
    }
  });

  it.each([
    ["°", "deg"],
    ["Degrees", "deg"],
    ["Nm", "N.m"],
    ["N·m", "N.m"],
    ["N*m", "N.m"],
    ["N m", "N.m"],
    ["Nmm", "N.mm"],
    ["µV", "uV"],
    ["μV", "uV"],
    ["microvolts", "uV"],
    ["sec", "s"],
    ["msec", "ms"],
    ["Newton", "N"],
    ["kpa", "kPa"],
  ])("reads %s, as laboratories write it, as %s", (text, unit) => {
    expect(readUnit(text)).toBe(unit);
  });

  it.each(["", "left", "counts", "deg/s", "Hz", "x"])("takes %j for none of the list", (text) => {
    expect(readUnit(text)).toBeNull();
  });
});

describe("isUnitText", () => {
  it("knows units that no channel can have, and names that are none", () => {
    for (const text of ["deg/s", "[Hz]", "a.u.", "%", "-", "°C", "ms"]) {
      expect(isUnitText(text), text).toBe(true);
    }
    for (const text of ["left", "t", "ang", "trq", "1.5", ""])
      expect(isUnitText(text), text).toBe(false);
  });
});
