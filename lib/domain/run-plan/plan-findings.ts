import type { Severity } from "@/lib/domain/compensation/types";

type Facts = Record<string, unknown>;

/** Where on the plan a finding stands. */
export type PlanPart = "devices" | "points" | "equipment";

interface Kind {
  severity: Severity;
  part: PlanPart;
  words: (facts: Facts) => string;
}

const show = (value: unknown) => (typeof value === "number" ? String(Number(value.toPrecision(6))) : String(value));

/**
 * Everything that can be said of a plan before it is run. hard: such a run would be refused, useless or dangerous, and is
 * not planned; soft: the readings would carry a finding that somebody has to answer for; note: worth knowing.
 */
const KINDS = {
  "plan.no_devices": { severity: "hard", part: "devices", words: () => "Name at least one device." },
  "plan.serial_unknown": { severity: "hard", part: "devices", words: () => "Not in the lot: is the serial right?" },
  "plan.serial_twice": { severity: "hard", part: "devices", words: () => "Stands in the plan twice." },
  "plan.position_invalid": {
    severity: "hard",
    part: "devices",
    words: () => "Needs a position of 1 to 32 characters, a letter or digit first.",
  },
  "plan.position_twice": {
    severity: "hard",
    part: "devices",
    words: (f) => `Position ${show(f.position)} is taken by ${show(f.by)}: two devices can't be in one place.`,
  },
  "plan.device_scrapped": { severity: "hard", part: "devices", words: () => "Scrapped: nothing is measured on it." },
  "plan.device_held": { severity: "soft", part: "devices", words: () => "Held: is it to be measured all the same?" },
  "plan.device_shipped": { severity: "soft", part: "devices", words: () => "Shipped: is it in the house?" },
  "plan.device_measured": {
    severity: "soft",
    part: "devices",
    words: (f) =>
      `In another ${show(f.purpose)} run that counts: one derivation can't use both, unless this run replaces that one.`,
  },
  "plan.device_in_sample": {
    severity: "soft",
    part: "devices",
    words: () => "In a sample run: as verification it proves nothing on the rest of the lot.",
  },
  "plan.sample_small": {
    severity: "soft",
    part: "devices",
    words: (f) =>
      `${f.n === 1 ? "1 sample device" : `${show(f.n)} sample devices`}: a pooled gain coefficient needs at least 5, and is refused below.`,
  },
  "plan.share_shown": {
    severity: "note",
    part: "devices",
    words: (f) =>
      `If all ${show(f.n)} pass, they show that at least ${show(f.percent)} % of the lot would ` +
      `(${show(f.confidencePercent)} % confidence).`,
  },
  "plan.too_many_rows": {
    severity: "hard",
    part: "devices",
    words: (f) =>
      `The plan asks for ${show(f.rows)} readings; a run takes at most ${show(f.rowsMax)}. Make it several runs.`,
  },
  "plan.no_points": { severity: "hard", part: "points", words: () => "Name at least one temperature." },
  "plan.point_twice": {
    severity: "hard",
    part: "points",
    words: () => "Two temperatures have this number: the readings could not be told apart.",
  },
  "plan.temperatures_too_few": {
    severity: "hard",
    part: "points",
    words: () => "Only one temperature counts: points have to be 5 K apart, or no coefficient of temperature follows.",
  },
  "plan.temperature_close": {
    severity: "soft",
    part: "points",
    words: (f) => `Less than 5 K from ${show(f.otherC)} °C: it does not count as a temperature of its own.`,
  },
  "plan.order_one_only": {
    severity: "note",
    part: "points",
    words: () =>
      "Two temperatures give a straight line that passes through both: no residual shows its error, and order 2 needs three.",
  },
  "plan.span_small": {
    severity: "soft",
    part: "points",
    words: (f) =>
      `The temperatures span ${show(f.spanK)} K where the family asks for ${show(f.minTemperatureSpanK)} K.`,
  },
  "plan.range_not_covered": {
    severity: "note",
    part: "points",
    words: (f) =>
      `Would prove ${show(f.low)} to ${show(f.high)} °C of the family's ${show(f.temperatureMinC)} to ${show(f.temperatureMaxC)} °C.`,
  },
  "plan.soak_short": {
    severity: "soft",
    part: "points",
    words: (f) => `${show(f.soakMin)} min of soak where the family asks for ${show(f.minSoakMinutes)} min.`,
  },
  "plan.load_above_capacity": {
    severity: "hard",
    part: "points",
    words: (f) => `${show(f.loadKg)} kg is above the capacity of ${show(f.capacityKg)} kg.`,
  },
  "plan.load_below_threshold": {
    severity: "soft",
    part: "points",
    words: (f) => `${show(f.loadKg)} kg is below the ${show(f.minLoadKg)} kg that the family asks for.`,
  },
  "plan.load_twice": {
    severity: "soft",
    part: "points",
    words: (f) => `${show(f.loadKg)} kg stands here twice: use repeats.`,
  },
  "plan.load_missing": {
    severity: "soft",
    part: "points",
    words: (f) => `No load, in a ${show(f.purpose)} run that is loaded at each temperature.`,
  },
  "plan.load_in_zero_run": {
    severity: "hard",
    part: "points",
    words: () => "A zero run takes unloaded readings only.",
  },
  "plan.dwell_differs": {
    severity: "soft",
    part: "points",
    words: () => "The time under load differs between temperatures: creep would enter gainTc.",
  },
  "plan.no_repeats": {
    severity: "note",
    part: "points",
    words: () => "Each reading is taken once: nothing will show how far readings scatter.",
  },
  "plan.no_return": {
    severity: "note",
    part: "points",
    words: () => "No point returns to an earlier temperature: a lasting shift couldn't be told from drift.",
  },
  "plan.span_far_from_reference": {
    severity: "note",
    part: "points",
    words: (f) =>
      `${show(f.setC)} °C is more than 5 K from the reference of ${show(f.referenceC)} °C: gain leans on gainTc.`,
  },
  "plan.equipment_none": {
    severity: "note",
    part: "equipment",
    words: () => "No equipment is named: what temperatures and loads are traceable to stays open.",
  },
  "plan.equipment_overdue": {
    severity: "soft",
    part: "equipment",
    words: (f) => `${show(f.code)} was due for calibration on ${show(f.calibratedUntil)}.`,
  },
} as const satisfies Record<string, Kind>;

export type PlanFindingCode = keyof typeof KINDS;

/** One thing to know about a plan, beside the device or the point it is about. */
export interface PlanFinding {
  code: PlanFindingCode;
  severity: Severity;
  part: PlanPart;
  serial: string | null;
  point: number | null;
  message: string;
  data: Facts;
}

/** A finding with its severity and sentence from the table. */
export function makePlanFinding(
  code: PlanFindingCode,
  { serial = null, point = null, data = {} }: { serial?: string | null; point?: number | null; data?: Facts } = {},
): PlanFinding {
  const { severity, part, words } = KINDS[code] as Kind;
  return { code, severity, part, serial, point, message: words(data), data };
}
