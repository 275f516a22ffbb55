import { forEachInSteps, type Steps } from "@/lib/domain/steps";
import { assertFamilyRules } from "./envelope";
import { listRunFindingsInSteps } from "./run-findings";
import type { FamilyRules, Finding, Purpose, Reading } from "./types";

/** Why a row can't be taken. `row` is the line of the file, the header being 1; `column` the name of section 2. */
export interface RowError {
  row: number;
  column: string;
  code: string;
  message: string;
}

/** What is wrong with a run (nothing is stored then) and, where nothing is, what to know about it. */
export interface RunCheck {
  errors: RowError[];
  findings: Finding[];
}

const RFC_3339 = /^\d{4}-\d{2}-\d{2}T\d{2}:\d{2}:\d{2}(\.\d+)?(Z|[+-]\d{2}:\d{2})$/i;

const NUMBERS = [
  ["chamberC", "chamber_c"],
  ["soakMin", "soak_min"],
  ["deviceTemp", "device_temp"],
  ["loadKg", "load_kg"],
  ["signalMvV", "signal_mv_v"],
] as const;

function note(errors: RowError[], row: number, column: string, code: string, message: string): void {
  errors.push({ row, column, code, message });
}

function rowErrors(reading: Reading, purpose: Purpose, errors: RowError[]): void {
  const { row } = reading;
  for (const [field, column] of NUMBERS)
    if (!Number.isFinite(reading[field]))
      note(errors, row, column, "reading.not_finite", "A finite number is needed here");
  if (!Number.isInteger(reading.point)) note(errors, row, "point", "reading.point_invalid", "point is an integer");
  if (reading.loadKg < 0) note(errors, row, "load_kg", "reading.load_negative", "A load is 0 or more");
  if (reading.soakMin < 0) note(errors, row, "soak_min", "reading.soak_negative", "A soak time is 0 or more");
  if (!RFC_3339.test(reading.takenAt) || Number.isNaN(Date.parse(reading.takenAt.toUpperCase()))) {
    const message = "A time with its offset is needed, as 2026-03-02T09:48:00Z (RFC 3339)";
    note(errors, row, "taken_at", "reading.time_invalid", message);
  }
  if (purpose === "zero" && reading.loadKg > 0)
    note(errors, row, "load_kg", "reading.load_in_zero_run", "A zero run has unloaded readings only");
  if (purpose === "proof" && !Number.isFinite(reading.outputMvV ?? Number.NaN)) {
    const message = "A proof run needs the compensated output of every reading";
    note(errors, row, "output_mv_v", "reading.output_missing", message);
  }
}

/** Rows that contradict other rows of their device. */
function* deviceErrors(readings: readonly Reading[], errors: RowError[]): Steps<void> {
  const unloaded = new Map<string, Set<number>>();
  const boards = new Map<string, string>();
  yield* forEachInSteps(readings, ({ serial, point, loadKg, hardwareId, row }) => {
    if (loadKg === 0) {
      const points = unloaded.get(serial);
      if (points) points.add(point);
      else unloaded.set(serial, new Set([point]));
    }
    if (!hardwareId) return;
    const board = boards.get(serial);
    if (board === undefined) boards.set(serial, hardwareId);
    else if (board !== hardwareId) {
      const message = `${serial} has another board here than in an earlier row`;
      errors.push({ row, column: "hardware_id", code: "reading.hardware_differs", message });
    }
  });
  yield* forEachInSteps(readings, ({ serial, point, loadKg, row }) => {
    if (!(loadKg > 0) || unloaded.get(serial)?.has(point)) return;
    const message = `${serial} has no unloaded reading at point ${point}`;
    errors.push({ row, column: "load_kg", code: "reading.loaded_without_unloaded", message });
  });
}

/**
 * Checks the readings of one run before they are stored. Errors come in the order of the rows; with an error there are
 * no findings, since those would rest on wrong rows.
 * @throws AppError `family.invalid`.
 */
export function* checkRun(family: FamilyRules, purpose: Purpose, readings: readonly Reading[]): Steps<RunCheck> {
  assertFamilyRules(family);
  const errors: RowError[] = [];
  if (readings.length === 0)
    errors.push({ row: 1, column: "serial", code: "run.empty", message: "The run has no reading" });
  yield* forEachInSteps(readings, (reading) => rowErrors(reading, purpose, errors));
  yield* deviceErrors(readings, errors);
  errors.sort((a, b) => a.row - b.row);
  return { errors, findings: errors.length > 0 ? [] : yield* listRunFindingsInSteps(family, purpose, readings) };
}
