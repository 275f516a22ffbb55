import type { FamilyRules } from "@/lib/domain/compensation/types";
import type { PlanFacts, PlannableDevice } from "@/lib/domain/run-plan/check-plan";
import type { PlannedPoint, RunPlan } from "@/lib/domain/run-plan/run-plan";

export const family: FamilyRules = {
  code: "MW-20",
  capacityKg: 20,
  nominalMvV: 2,
  referenceC: 20,
  accuracyClass: "C",
  intervals: 3000,
  vMinRatioY: 10000,
  pLc: 0.7,
  temperatureMinC: -10,
  temperatureMaxC: 40,
  minSoakMinutes: 90,
  minLoadFraction: 0.5,
  minTemperatureSpanK: 25,
  temperatureShare: 0.5,
  coverage: 0.95,
  confidence: 0.95,
};

export const point = (n: number, setC: number, more: Partial<PlannedPoint> = {}): PlannedPoint => ({
  point: n,
  setC,
  soakMin: 90,
  loadsKg: [20],
  repeats: 3,
  dwellS: 30,
  ...more,
});

export const serials = (count: number) => Array.from({ length: count }, (_, i) => `S-${i + 1}`);

export const goodPlan = (more: Partial<RunPlan> = {}): RunPlan => ({
  purpose: "sample",
  devices: serials(5).map((serial, i) => ({ serial, position: `P${i + 1}` })),
  points: [point(1, -10), point(2, 20), point(3, 40), point(4, -10)],
  ...more,
});

export const device = (serial: string, more: Partial<PlannableDevice> = {}): PlannableDevice => ({
  serial,
  held: false,
  scrapped: false,
  shipped: false,
  measuredIn: [],
  ...more,
});

export const facts = (more: Partial<PlanFacts> = {}): PlanFacts => ({
  family,
  devices: new Map(serials(9).map((serial) => [serial, device(serial)])),
  equipment: [{ code: "TS-01", calibratedUntil: "2027-01-31" }],
  today: "2026-12-01",
  ...more,
});
