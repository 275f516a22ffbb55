import { describe, expect, it } from "vitest";
import type { Reading } from "@/lib/domain/compensation/types";
import { compareEquipment, compareWithPlan } from "@/lib/domain/run-plan/compare-run";
import { plannedReadings, type RunPlan } from "@/lib/domain/run-plan/run-plan";
import { finish } from "@/lib/domain/steps";
import { goodPlan, point } from "./plan-facts";

const taken = (plan: RunPlan): Reading[] =>
  [...plannedReadings(plan)].map((planned, i) => ({
    ...planned,
    row: i + 2,
    chamberC: 20,
    soakMin: 95,
    deviceTemp: 1900,
    signalMvV: 0.1,
    takenAt: "2026-01-01T00:00:00Z",
  }));
const codes = (plan: RunPlan, readings: Reading[]) =>
  finish(compareWithPlan(plan, readings)).map(({ code, serial, point: at, data }) => [code, serial, at, data?.devices]);

describe("compareWithPlan", () => {
  const plan = goodPlan();

  it("finds nothing in what was done as planned, true loads and repeats aside", () => {
    const readings = taken(plan).map((one) => ({ ...one, loadKg: one.loadKg * 1.003 }));
    expect(codes(plan, readings)).toEqual([]);
    expect(codes(plan, [...readings, ...readings])).toEqual([]);
    expect(
      codes(
        plan,
        readings.map((one) => ({ ...one, position: null })),
      ),
    ).toEqual([]);
  });

  it("names a device left out at one point once a point, loaded and unloaded told apart", () => {
    expect(
      codes(
        plan,
        taken(plan).filter((one) => !(one.serial === "S-2" && one.point === 3)),
      ),
    ).toEqual([["plan.reading_missing", "S-2", 3, 1]]);
    const unloaded = taken(plan).filter((one) => one.point !== 3 || one.loadKg === 0);
    expect(codes(plan, unloaded)).toEqual([["plan.reading_missing", null, 3, 5]]);
  });

  it("sees two devices that changed places", () => {
    const swap: Record<string, string> = { P1: "P2", P2: "P1" };
    const readings = taken(plan).map((one) => ({ ...one, position: swap[one.position ?? ""] ?? one.position }));
    expect(codes(plan, readings)).toEqual([["plan.position_differs", null, null, 2]]);
  });

  it("tells another load from the true value of the same, and what was not planned at all", () => {
    const [first, ...rest] = taken(plan).filter((one) => one.loadKg > 0) as [Reading, ...Reading[]];
    const zeros = taken(plan).filter((one) => one.loadKg === 0);
    expect(codes(plan, [...zeros, ...rest, { ...first, loadKg: 18.9 }])).toEqual([["plan.load_differs", "S-1", 1, 1]]);
    expect(codes(plan, [...taken(plan), { ...first, serial: "X-9" }, { ...first, point: 9 }])).toEqual([
      ["plan.reading_unplanned", "X-9", 1, 1],
      ["plan.reading_unplanned", "S-1", 9, 1],
    ]);
  });

  it("takes any of several planned loads", () => {
    const several = goodPlan({ points: [point(1, 10, { loadsKg: [10, 20] }), point(2, 40)] });
    expect(codes(several, taken(several))).toEqual([]);
  });
});

describe("compareEquipment", () => {
  it("names both ways in which it differs", () => {
    expect(compareEquipment(["A", "B"], ["B", "A"])).toEqual([]);
    const [finding] = compareEquipment(["A", "B"], ["B", "C"]);
    expect(finding).toMatchObject({ code: "plan.equipment_differs", data: { missing: ["A"], other: ["C"] } });
    expect(finding?.message).toBe("Other equipment than planned (planned and not named: A; named and not planned: C).");
  });
});
