import { describe, expect, it } from "vitest";
import { checkPlan } from "@/lib/domain/run-plan/check-plan";
import { proposePoints } from "@/lib/domain/run-plan/propose-points";
import type { RunPlan } from "@/lib/domain/run-plan/run-plan";
import { device, facts, family, goodPlan, point, serials } from "./plan-facts";

const found = (plan: Partial<RunPlan>, given = facts()) =>
  checkPlan(goodPlan(plan), given).map(({ code, severity, serial, point: at }) => [code, severity, serial ?? at]);
const withDevice = (more: object) =>
  facts({ devices: new Map(serials(9).map((serial) => [serial, device(serial, serial === "S-2" ? more : {})])) });

describe("checkPlan", () => {
  it("has nothing to say of a plan that follows the family's rules", () => {
    expect(found({})).toEqual([]);
  });

  it.each(["sample", "zero", "span", "verification"] as const)(
    "finds nothing to answer for in the proposal for a %s run",
    (purpose) => {
      const points = proposePoints(family, purpose);
      const findings = checkPlan(goodPlan({ purpose, points }), facts());
      expect(findings.filter(({ severity }) => severity !== "note")).toEqual([]);
    },
  );

  it("knows the serials of the lot and each place once", () => {
    const devices = [
      { serial: "S-1", position: "P1" },
      { serial: "X-1", position: "P2" },
      { serial: "S-2", position: "P1" },
      { serial: "S-1", position: "P4" },
      { serial: "S-3", position: "=cmd" },
    ];
    expect(found({ devices })).toEqual([
      ["plan.serial_unknown", "hard", "X-1"],
      ["plan.position_invalid", "hard", "S-3"],
      ["plan.position_twice", "hard", "S-2"],
      ["plan.serial_twice", "hard", "S-1"],
    ]);
  });

  it.each([
    ["plan.device_scrapped", "hard", "sample", { scrapped: true, held: true }],
    ["plan.device_held", "soft", "sample", { held: true }],
    ["plan.device_shipped", "soft", "sample", { shipped: true }],
    ["plan.device_measured", "soft", "sample", { measuredIn: ["sample"] }],
    ["plan.device_in_sample", "soft", "verification", { measuredIn: ["sample"] }],
  ] as const)("says %s", (code, severity, purpose, more) => {
    expect(found({ purpose }, withDevice(more))).toContainEqual([code, severity, "S-2"]);
  });

  it("asks for 5 sample devices, and tells what k of k verification devices show", () => {
    const devices = goodPlan().devices.slice(0, 4);
    expect(found({ devices })).toEqual([["plan.sample_small", "soft", null]]);
    // 0.05^(1/5) = 0.5493: cut to 54.9 %, never rounded up.
    const [shown] = checkPlan(goodPlan({ purpose: "verification" }), facts());
    expect(shown?.data).toEqual({ n: 5, percent: 54.9, confidencePercent: 95 });
  });

  it("counts temperatures as the contract does: rising, 5 K above the last one counted", () => {
    const at = (...set: number[]) => ({ points: set.map((setC, i) => point(i + 1, setC)) });
    expect(found(at(-10, -6, -3, 40, -10))).toEqual([["plan.temperature_close", "soft", 2]]);
    expect(found(at(20, 24))).toEqual([
      ["plan.temperature_close", "soft", 2],
      ["plan.temperatures_too_few", "hard", null],
    ]);
    expect(found(at(0, 40))).toEqual([
      ["plan.order_one_only", "note", null],
      ["plan.range_not_covered", "note", null],
      ["plan.no_return", "note", null],
    ]);
    expect(found(at(10, 30, 10))).toEqual([
      ["plan.order_one_only", "note", null],
      ["plan.span_small", "soft", null],
      ["plan.range_not_covered", "note", null],
    ]);
  });

  it("takes 5 K and the family's span at their very edge", () => {
    const points = [point(1, 10.1), point(2, 15.1), point(3, 35.1), point(4, 10.1)];
    const rules = { ...family, temperatureMinC: 8.1, temperatureMaxC: 37.1 };
    expect(found({ points }, facts({ family: rules }))).toEqual([]);
  });

  it("looks at soak, loads, dwell and repeats", () => {
    const points = [
      point(1, -10, { soakMin: 60 }),
      point(2, 20, { loadsKg: [9.99, 20.1, 10, 10] }),
      point(3, 40, { loadsKg: [], dwellS: 60 }),
      point(3, -10),
    ];
    expect(found({ points })).toEqual([
      ["plan.soak_short", "soft", 1],
      ["plan.load_below_threshold", "soft", 2],
      ["plan.load_above_capacity", "hard", 2],
      ["plan.load_twice", "soft", 2],
      ["plan.load_missing", "soft", 3],
      ["plan.point_twice", "hard", 3],
      ["plan.dwell_differs", "soft", null],
    ]);
    expect(found({ points: goodPlan().points.map((one) => ({ ...one, repeats: 1 })) })).toEqual([
      ["plan.no_repeats", "note", null],
    ]);
    expect(found({ purpose: "zero" }).map(([code]) => code)).toEqual(Array(4).fill("plan.load_in_zero_run"));
  });

  it("keeps a span run near the reference, and asks it for no second temperature", () => {
    expect(found({ purpose: "span", points: [point(1, 25)] })).toEqual([]);
    expect(found({ purpose: "span", points: [point(1, 25.1)] })).toEqual([["plan.span_far_from_reference", "note", 1]]);
  });

  it("names equipment past its date, which is good on its last day", () => {
    const due = (calibratedUntil: string) => facts({ equipment: [{ code: "TS-01", calibratedUntil }] });
    expect(found({}, due("2026-12-01"))).toEqual([]);
    expect(found({}, due("2026-11-30"))).toEqual([["plan.equipment_overdue", "soft", null]]);
    expect(found({}, facts({ equipment: [] }))).toEqual([["plan.equipment_none", "note", null]]);
  });

  it("plans nothing empty and nothing that no upload takes", () => {
    expect(found({ devices: [], points: [] })).toEqual([
      ["plan.no_devices", "hard", null],
      ["plan.no_points", "hard", null],
    ]);
    const devices = serials(30_001).map((serial) => ({ serial, position: serial }));
    const known = new Map(devices.map(({ serial }) => [serial, device(serial)]));
    expect(
      found(
        { devices, points: [1, 2, 3, 4].map((n) => point(n, n * 10, { repeats: 5, loadsKg: [] })) },
        facts({ devices: known }),
      ),
    ).toContainEqual(["plan.too_many_rows", "hard", null]);
  });

  it("has a sentence for each without a hole in it", () => {
    const plans = [
      goodPlan({ devices: [], points: [] }),
      goodPlan({ points: [point(1, 20, { soakMin: 1, loadsKg: [1, 1, 30] })] }),
    ];
    for (const plan of plans)
      for (const { message } of checkPlan(plan, facts({ equipment: [] })))
        expect(message).not.toMatch(/undefined|NaN|null/);
  });
});
