import type { Db } from "@/db/executor";
import { checkRun } from "@/lib/domain/compensation/run-checks";
import type { FamilyRules, Finding, Purpose, Reading } from "@/lib/domain/compensation/types";
import { type ParsedReadings, parseReadingsCsv } from "@/lib/domain/readings/parse-readings-csv";
import { RowErrorList } from "@/lib/domain/readings/row-error-list";
import { AppError } from "@/lib/errors";
import { type MatchedSerials, matchSerials } from "./match-serials";

export interface RunFile extends MatchedSerials {
  readings: Reading[];
  findings: Finding[];
}

export interface RunFileInput {
  lot: { id: string; code: string };
  rules: FamilyRules;
  purpose: Purpose;
  addDevices: boolean;
  bytes: Buffer;
}

/**
 * Reads an uploaded run and checks all of it: cells, serials, and the rules of section 2.
 * @throws AppError `run.invalid` {errors, errorCount} naming row, column, code and message; `run.too_many_rows`
 */
export async function readRunFile(db: Db, input: RunFileInput): Promise<RunFile> {
  const parsed = await parseReadingsCsv(input.bytes);
  const errors = new RowErrorList();
  const matched = await matchSerials(db, input.lot, parsed.readings, input.addDevices, errors);
  const { errors: contradictions, findings } = checkRun(input.rules, input.purpose, parsed.readings);
  for (const error of contradictions) if (isCertain(error, parsed)) errors.add(error);
  for (const error of parsed.errors) errors.add(error);
  const errorCount = errors.total + parsed.errorCount - parsed.errors.length;
  if (errorCount === 0) return { readings: parsed.readings, findings, ...matched };
  throw new AppError("run.invalid", {
    errors: errors.list(),
    errorCount,
    message: `${errorCount === 1 ? "One error" : `${errorCount.toLocaleString("en")} errors`} in the file; nothing was stored.`,
  });
}

/** A missing unloaded reading is no finding of its own where the row that could be it is named as wrong already. */
function isCertain(error: { code: string; row: number }, { badRows, errorCount, readings }: ParsedReadings): boolean {
  if (errorCount === 0) return true;
  if (error.code === "run.empty") return false;
  if (error.code !== "reading.loaded_without_unloaded") return true;
  if (badRows.length === 0) return false;
  const loaded = readings.find((reading) => reading.row === error.row);
  return !badRows.some(
    ({ serial = loaded?.serial, point = loaded?.point }) => serial === loaded?.serial && point === loaded?.point,
  );
}
