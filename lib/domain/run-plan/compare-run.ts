import type { Finding, Reading, Severity } from "@/lib/domain/compensation/types";
import { forEachInSteps, mapInSteps, type Steps } from "@/lib/domain/steps";
import { plannedReadings, type RunPlan } from "./run-plan";

/** Serials that a finding names; the count is always whole. */
const NAMED_MAX = 20;
/** A load this far from the planned one is another load, not the true value of the same. */
const LOAD_SHARE = 0.05;

interface Kind {
  severity: Severity;
  words: (devices: string) => string;
}

const KINDS = {
  "plan.reading_missing": {
    severity: "soft",
    words: (devices) => `Planned readings were not taken (${devices}).`,
  },
  "plan.reading_unplanned": {
    severity: "note",
    words: (devices) => `Readings were taken that the plan doesn't have (${devices}).`,
  },
  "plan.position_differs": {
    severity: "soft",
    words: (devices) =>
      `Read at another position than planned (${devices}): were two devices swapped, in the chamber or in the file?`,
  },
  "plan.load_differs": {
    severity: "note",
    words: (devices) => `Loaded with more than 5 % more or less than planned (${devices}).`,
  },
} as const satisfies Record<string, Kind>;

type Code = keyof typeof KINDS;

/** Findings of many devices, one a code and point. */
class Deviations {
  private readonly gathered = new Map<string, { code: Code; point: number | null; serials: Set<string> }>();

  add(code: Code, point: number | null, serial: string): void {
    const key = `${code} ${point}`;
    const known = this.gathered.get(key);
    if (known) known.serials.add(serial);
    else this.gathered.set(key, { code, point, serials: new Set([serial]) });
  }

  list(): Finding[] {
    return [...this.gathered.values()].map(({ code, point, serials }) => {
      const names = [...serials];
      const count = names.length;
      const { severity, words } = KINDS[code];
      const message = words(count === 1 ? "one device" : `${count} devices`);
      const data = { devices: count, serials: names.slice(0, NAMED_MAX) };
      return { code, severity, serial: count === 1 ? (names[0] ?? null) : null, point, message, data };
    });
  }
}

/** The key of a measurement within a run: serial, point, and load zero or not (contract, section 2). */
const keyOf = ({ serial, point, loadKg }: { serial: string; point: number; loadKg: number }) =>
  `${serial} ${point} ${loadKg > 0 ? "loaded" : "unloaded"}`;

/**
 * What a run has that its plan doesn't, and the other way round: readings by key, positions where the file names them, and
 * loads. Findings of one code and point are gathered.
 */
export function* compareWithPlan(plan: RunPlan, readings: readonly Reading[]): Steps<Finding[]> {
  const found = new Deviations();
  const taken = new Set(yield* mapInSteps(readings, keyOf));
  const planned = new Map<string, number[]>();
  yield* forEachInSteps(plannedReadings(plan), (reading) => {
    const key = keyOf(reading);
    const loads = planned.get(key);
    if (loads) loads.push(reading.loadKg);
    else planned.set(key, [reading.loadKg]);
    if (!taken.has(key)) found.add("plan.reading_missing", reading.point, reading.serial);
  });
  const positions = new Map(plan.devices.map(({ serial, position }) => [serial, position]));
  yield* forEachInSteps(readings, (reading) => checkReading(reading, planned.get(keyOf(reading)), positions, found));
  return found.list();
}

function checkReading(
  reading: Reading,
  loads: readonly number[] | undefined,
  positions: ReadonlyMap<string, string>,
  found: Deviations,
): void {
  const { serial, point, position, loadKg } = reading;
  if (!loads) found.add("plan.reading_unplanned", point, serial);
  else if (loadKg > 0 && !loads.some((planned) => Math.abs(loadKg - planned) <= planned * LOAD_SHARE))
    found.add("plan.load_differs", point, serial);
  const place = positions.get(serial);
  if (position && place !== undefined && position !== place) found.add("plan.position_differs", null, serial);
}

/** What was planned to be used and was not named, and the other way round. */
export function compareEquipment(planned: readonly string[], used: readonly string[]): Finding[] {
  const missing = planned.filter((code) => !used.includes(code));
  const other = used.filter((code) => !planned.includes(code));
  if (missing.length === 0 && other.length === 0) return [];
  const parts = [
    missing.length > 0 ? `planned and not named: ${missing.join(", ")}` : "",
    other.length > 0 ? `named and not planned: ${other.join(", ")}` : "",
  ].filter(Boolean);
  const message = `Other equipment than planned (${parts.join("; ")}).`;
  return [
    { code: "plan.equipment_differs", severity: "note", serial: null, point: null, message, data: { missing, other } },
  ];
}
