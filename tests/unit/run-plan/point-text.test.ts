import { describe, expect, it } from "vitest";
import { readPoint, writePoint } from "@/lib/domain/run-plan/point-text";
import { proposePoints } from "@/lib/domain/run-plan/propose-points";
import { family, point } from "./plan-facts";

const text = (more: object = {}) => ({ ...writePoint(point(1, -10)), ...more });

describe("readPoint", () => {
  it("reads back what it wrote", () => {
    const one = point(3, -10.5, { loadsKg: [10, 20.25], soakMin: 0, dwellS: 0 });
    expect(readPoint(writePoint(one))).toEqual({ point: one, wrong: {} });
  });

  it("takes a true minus sign, no loads at all, and loads parted by blanks or semicolons", () => {
    expect(readPoint(text({ setC: "−10.5" })).point?.setC).toBe(-10.5);
    expect(readPoint(text({ loads: " " })).point?.loadsKg).toEqual([]);
    expect(readPoint(text({ loads: "10; 20  5" })).point?.loadsKg).toEqual([10, 20, 5]);
  });

  it("never takes a decimal comma for two loads, nor anything else that is no number", () => {
    for (const loads of ["12,5", "0", "-1", "1e3", "x"]) expect(readPoint(text({ loads })).wrong.loads).toBeDefined();
    const { point: none, wrong } = readPoint({
      point: "1.5",
      setC: "999",
      soakMin: "",
      loads: "",
      repeats: "0",
      dwellS: "x",
    });
    expect(none).toBeUndefined();
    expect(Object.keys(wrong)).toEqual(["point", "setC", "soakMin", "repeats", "dwellS"]);
  });
});

describe("proposePoints", () => {
  it("goes from the coldest over the reference to the hottest and back", () => {
    expect(proposePoints(family, "sample").map(({ setC }) => setC)).toEqual([-10, 20, 40, -10]);
    expect(proposePoints(family, "span").map(({ setC }) => setC)).toEqual([20]);
    expect(proposePoints({ ...family, referenceC: 37 }, "zero").map(({ setC, loadsKg }) => [setC, loadsKg])).toEqual([
      [-10, []],
      [40, []],
      [-10, []],
    ]);
  });
});
