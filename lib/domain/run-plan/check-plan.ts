import { groupByTemperature } from "@/lib/domain/compensation/points";
import { shareShown } from "@/lib/domain/compensation/share-shown";
import type { FamilyRules } from "@/lib/domain/compensation/types";
import { makePlanFinding, type PlanFinding } from "./plan-findings";
import { POSITION_FORM } from "./positions";
import { countPlannedRows, PLAN_ROWS_MAX, type PlannedDevice, type PlannedPoint, type RunPlan } from "./run-plan";

/** A device of the lot, as a plan has to know it. */
export interface PlannableDevice {
  serial: string;
  held: boolean;
  scrapped: boolean;
  shipped: boolean;
  /** Purposes of the runs that count and that it is in. */
  measuredIn: readonly string[];
}

export interface PlannableEquipment {
  code: string;
  /** `YYYY-MM-DD`, last day of validity. */
  calibratedUntil: string;
}

export interface PlanFacts {
  family: FamilyRules;
  /** Devices of the lot by serial; those that are not there are unknown. */
  devices: ReadonlyMap<string, PlannableDevice>;
  /** What is planned to be used. */
  equipment: readonly PlannableEquipment[];
  /** `YYYY-MM-DD` */
  today: string;
}

/** Fewest sample devices of a pooled gain coefficient (contract, section 3). */
export const SAMPLE_MIN = 5;
/** A span point further from the reference is at another distinct temperature. */
const NEAR_K = 5;
/** What lies beyond the outer temperatures and still counts as proven (contract, section 3). */
const PROVEN_BEYOND_K = 2;

/** What is to be said of a plan, in the order of its parts: devices, points, equipment. */
export function checkPlan(plan: RunPlan, facts: PlanFacts): PlanFinding[] {
  const { purpose, devices, points } = plan;
  return [
    ...devices.flatMap((device) => checkDevice(device, plan, facts)),
    ...checkTwice(devices),
    ...checkCounts(plan, facts.family),
    ...points.flatMap((point) => checkPoint(point, plan, facts.family)),
    ...checkTemperatures(plan, facts.family),
    ...(purpose === "span" ? checkNearReference(points, facts.family) : []),
    ...checkEquipment(facts),
  ];
}

function checkDevice({ serial, position }: PlannedDevice, { purpose }: RunPlan, facts: PlanFacts): PlanFinding[] {
  const found: PlanFinding[] = [];
  const known = facts.devices.get(serial);
  if (!known) found.push(makePlanFinding("plan.serial_unknown", { serial }));
  if (!POSITION_FORM.test(position)) found.push(makePlanFinding("plan.position_invalid", { serial }));
  if (!known) return found;
  if (known.scrapped) found.push(makePlanFinding("plan.device_scrapped", { serial }));
  else if (known.held) found.push(makePlanFinding("plan.device_held", { serial }));
  else if (known.shipped && purpose !== "proof") found.push(makePlanFinding("plan.device_shipped", { serial }));
  if (known.measuredIn.includes(purpose))
    found.push(makePlanFinding("plan.device_measured", { serial, data: { purpose } }));
  if (purpose === "verification" && known.measuredIn.includes("sample"))
    found.push(makePlanFinding("plan.device_in_sample", { serial }));
  return found;
}

function checkTwice(devices: readonly PlannedDevice[]): PlanFinding[] {
  const found: PlanFinding[] = [];
  const serials = new Set<string>();
  const positions = new Map<string, string>();
  for (const { serial, position } of devices) {
    if (serials.has(serial)) found.push(makePlanFinding("plan.serial_twice", { serial }));
    serials.add(serial);
    const by = positions.get(position);
    if (by !== undefined) found.push(makePlanFinding("plan.position_twice", { serial, data: { position, by } }));
    else if (position !== "") positions.set(position, serial);
  }
  return found;
}

function checkCounts(plan: RunPlan, family: FamilyRules): PlanFinding[] {
  const n = plan.devices.length;
  if (n === 0) return [makePlanFinding("plan.no_devices")];
  const found: PlanFinding[] = [];
  if (plan.purpose === "sample" && n < SAMPLE_MIN) found.push(makePlanFinding("plan.sample_small", { data: { n } }));
  if (plan.purpose === "verification") {
    const percent = Math.floor(shareShown(n, family.confidence) * 1000) / 10;
    const data = { n, percent, confidencePercent: family.confidence * 100 };
    found.push(makePlanFinding("plan.share_shown", { data }));
  }
  const rows = countPlannedRows(plan);
  if (rows > PLAN_ROWS_MAX)
    found.push(makePlanFinding("plan.too_many_rows", { data: { rows, rowsMax: PLAN_ROWS_MAX } }));
  return found;
}

function checkPoint(at: PlannedPoint, { purpose }: RunPlan, family: FamilyRules): PlanFinding[] {
  const { point, soakMin, loadsKg } = at;
  const found: PlanFinding[] = [];
  if (soakMin < family.minSoakMinutes) {
    const data = { soakMin, minSoakMinutes: family.minSoakMinutes };
    found.push(makePlanFinding("plan.soak_short", { point, data }));
  }
  if (purpose === "zero" && loadsKg.length > 0) found.push(makePlanFinding("plan.load_in_zero_run", { point }));
  if (purpose !== "zero" && loadsKg.length === 0)
    found.push(makePlanFinding("plan.load_missing", { point, data: { purpose } }));
  loadsKg.forEach((loadKg, index) => {
    found.push(...checkLoad(loadKg, point, family));
    if (loadsKg.indexOf(loadKg) < index) found.push(makePlanFinding("plan.load_twice", { point, data: { loadKg } }));
  });
  return found;
}

function checkLoad(loadKg: number, point: number, { capacityKg, minLoadFraction }: FamilyRules): PlanFinding[] {
  const minLoadKg = minLoadFraction * capacityKg;
  if (loadKg > capacityKg)
    return [makePlanFinding("plan.load_above_capacity", { point, data: { loadKg, capacityKg } })];
  // The threshold is a product of decimals: a load written exactly at it is not below.
  if (loadKg < minLoadKg * (1 - 1e-12))
    return [makePlanFinding("plan.load_below_threshold", { point, data: { loadKg, minLoadKg } })];
  return [];
}

function checkTemperatures({ purpose, points }: RunPlan, family: FamilyRules): PlanFinding[] {
  if (points.length === 0) return [makePlanFinding("plan.no_points")];
  const found = points
    .filter((one, index) => points.findIndex((other) => other.point === one.point) < index)
    .map(({ point }) => makePlanFinding("plan.point_twice", { point }));
  if (purpose !== "zero" && new Set(points.map((one) => one.dwellS)).size > 1)
    found.push(makePlanFinding("plan.dwell_differs"));
  if (points.every((one) => one.repeats < 2)) found.push(makePlanFinding("plan.no_repeats"));
  if (purpose === "span" || purpose === "proof") return found;
  return [...found, ...checkSpread(points, family)];
}

/** Several temperatures: how many count, how far they reach, and whether the run comes back to one. */
function checkSpread(points: readonly PlannedPoint[], family: FamilyRules): PlanFinding[] {
  const found: PlanFinding[] = [];
  const groups = groupByTemperature(points.map((one) => ({ chamberC: one.setC, point: one.point })));
  for (const group of groups) {
    const otherC = group[0]?.chamberC;
    for (const { chamberC, point } of group)
      if (chamberC !== otherC) found.push(makePlanFinding("plan.temperature_close", { point, data: { otherC } }));
  }
  if (groups.length < 2) return [...found, makePlanFinding("plan.temperatures_too_few")];
  if (groups.length === 2) found.push(makePlanFinding("plan.order_one_only"));
  const set = points.map((one) => one.setC);
  const [low, high] = [Math.min(...set), Math.max(...set)];
  const { minTemperatureSpanK, temperatureMinC, temperatureMaxC } = family;
  if (high - low < minTemperatureSpanK - 1e-9)
    found.push(makePlanFinding("plan.span_small", { data: { spanK: high - low, minTemperatureSpanK } }));
  const proven = { low: low - PROVEN_BEYOND_K, high: high + PROVEN_BEYOND_K };
  if (proven.low > temperatureMinC || proven.high < temperatureMaxC)
    found.push(makePlanFinding("plan.range_not_covered", { data: { ...proven, temperatureMinC, temperatureMaxC } }));
  if (groups.every((group) => group.length === 1)) found.push(makePlanFinding("plan.no_return"));
  return found;
}

function checkNearReference(points: readonly PlannedPoint[], { referenceC }: FamilyRules): PlanFinding[] {
  return points
    .filter(({ setC }) => Math.abs(setC - referenceC) > NEAR_K)
    .map(({ point, setC }) => makePlanFinding("plan.span_far_from_reference", { point, data: { setC, referenceC } }));
}

function checkEquipment({ equipment, today }: PlanFacts): PlanFinding[] {
  if (equipment.length === 0) return [makePlanFinding("plan.equipment_none")];
  return equipment
    .filter(({ calibratedUntil }) => calibratedUntil < today)
    .map((one) => makePlanFinding("plan.equipment_overdue", { data: { ...one, today } }));
}
