import { AppError } from "@/lib/errors";
import { makeFinding } from "./findings";
import { type DeviceRows, gatherReadings, pointMeans } from "./points";
import type { DevicePoint, Finding, Purpose, RunReadings } from "./types";

/** Purposes a device's thermometer and zero may come from, in the order in which they count. */
export const HOME_PURPOSES = ["sample", "zero", "verification"] as const;

/** Everything the runs say about one device. */
export interface DeviceRecord {
  serial: string;
  points: Partial<Record<Purpose, DevicePoint[]>>;
  /** Board of the first run that names one. */
  hardwareId: string | null;
  boardChanged: boolean;
}

function serialsOf(run: RunReadings): Set<string> {
  return new Set(run.readings.map((reading) => reading.serial));
}

/**
 * The runs that count: those superseded by another one of the list and proof runs are left out, and said so.
 */
export function selectRuns(runs: readonly RunReadings[]): { used: RunReadings[]; findings: Finding[] } {
  const findings: Finding[] = [];
  const replacing = new Map<string, RunReadings>();
  for (const run of runs) if (run.supersedes) replacing.set(run.supersedes, run);
  const used: RunReadings[] = [];
  for (const run of runs) {
    const by = replacing.get(run.id);
    if (by) {
      findings.push(makeFinding("run.superseded", { data: { run: run.id, by: by.id } }));
      const repeated = serialsOf(by);
      const lost = [...serialsOf(run)].filter((serial) => !repeated.has(serial));
      const data = { run: run.id, by: by.id, devices: lost.length, serials: lost.slice(0, 20) };
      if (lost.length > 0) findings.push(makeFinding("run.superseded_not_repeated", { data }));
    } else if (run.purpose === "proof") findings.push(makeFinding("run.proof_not_used", { data: { run: run.id } }));
    else used.push(run);
  }
  return { used, findings };
}

function recordFor(records: Map<string, DeviceRecord>, serial: string, rows: DeviceRows): DeviceRecord {
  const known = records.get(serial);
  if (known) {
    if (known.hardwareId && rows.hardwareId && known.hardwareId !== rows.hardwareId) known.boardChanged = true;
    known.hardwareId ??= rows.hardwareId;
    return known;
  }
  const record: DeviceRecord = { serial, points: {}, hardwareId: rows.hardwareId, boardChanged: false };
  records.set(serial, record);
  return record;
}

/**
 * Point means of every device, by purpose.
 * @throws AppError `run.serial_repeated` {serial, purpose, runs} where two runs of one purpose name a serial;
 * `reading.loaded_without_unloaded`.
 */
export function collectDevices(runs: readonly RunReadings[], capacityKg: number): DeviceRecord[] {
  const records = new Map<string, DeviceRecord>();
  const runOf = new Map<Purpose, RunReadings[]>();
  for (const run of runs) {
    for (const [serial, rows] of gatherReadings(run.readings)) {
      const record = recordFor(records, serial, rows);
      if (record.points[run.purpose]) {
        const earlier = runOf.get(run.purpose)?.find((other) => other.readings.some((row) => row.serial === serial));
        throw new AppError("run.serial_repeated", {
          serial,
          purpose: run.purpose,
          runs: [earlier?.id, run.id],
          message: `${serial} is in two ${run.purpose} runs, and neither supersedes the other`,
        });
      }
      record.points[run.purpose] = pointMeans(serial, rows, run.purpose, capacityKg);
    }
    runOf.set(run.purpose, [...(runOf.get(run.purpose) ?? []), run]);
  }
  return [...records.values()].sort((a, b) => (a.serial < b.serial ? -1 : 1));
}

/** Names that a finding lists; the count is always whole. */
const NAMED_MAX = 20;

/**
 * Devices with more than one run that could give thermometer and zero: the readings of the others are not used for them.
 * A sample device in the verification run has a finding of its own, since that run is to prove something.
 */
export function listTwiceMeasured(records: readonly DeviceRecord[]): Finding[] {
  const found = new Map<string, { used: Purpose; other: Purpose; serials: string[] }>();
  for (const { serial, points } of records) {
    const [used, ...others] = HOME_PURPOSES.filter((purpose) => points[purpose]);
    for (const other of others) {
      if (!used || (used === "sample" && other === "verification")) continue;
      const known = found.get(`${used} ${other}`);
      if (known) known.serials.push(serial);
      else found.set(`${used} ${other}`, { used, other, serials: [serial] });
    }
  }
  return [...found.values()].map(({ used, other, serials }) => {
    const data = { used, other, devices: serials.length, serials: serials.slice(0, NAMED_MAX) };
    return makeFinding("device.in_two_runs", { serial: serials.length === 1 ? serials[0] : null, data });
  });
}
