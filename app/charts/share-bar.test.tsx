import { describe, expect, it } from "vitest";
import { labelPlaces } from "./share-bar.tsx";

describe("labels below a share bar", () => {
  it("stand below their parts where there is room", () => {
    expect(labelPlaces([0, 100, 200], 280)).toEqual([0, 100, 200]);
  });

  it("make room for each other and for the end", () => {
    expect(labelPlaces([0, 110, 130], 280)).toEqual([0, 110, 164]);
    expect(labelPlaces([0, 250, 270], 280)).toEqual([0, 172, 226]);
  });
});
