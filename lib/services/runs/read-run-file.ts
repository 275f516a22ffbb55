import type { Db } from "@/db/executor";
import type { FamilyRules, Finding, Purpose, Reading } from "@/lib/domain/compensation/types";
import { judgeReadings } from "@/lib/domain/readings/judge-readings";
import { parseReadingsCsv } from "@/lib/domain/readings/parse-readings-csv";
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
  const { errorCount, findings } = judgeReadings(input.rules, input.purpose, parsed, errors);
  if (errorCount === 0) return { readings: parsed.readings, findings, ...matched };
  throw new AppError("run.invalid", {
    errors: errors.list(),
    errorCount,
    message: `${errorCount === 1 ? "One error" : `${errorCount.toLocaleString("en")} errors`} in the file; nothing was stored.`,
  });
}
