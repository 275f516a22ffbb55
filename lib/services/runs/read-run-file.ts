import type { Db } from "@/db/executor";
import type { FamilyRules, Finding, Purpose, Reading } from "@/lib/domain/compensation/types";
import { judgeReadingsInSteps } from "@/lib/domain/readings/judge-readings";
import { parseReadingsCsv } from "@/lib/domain/readings/parse-readings-csv";
import { RowErrorList } from "@/lib/domain/readings/row-error-list";
import type { Steps } from "@/lib/domain/steps";
import { AppError } from "@/lib/errors";
import { inSlices } from "@/lib/services/in-slices";
import { type MatchedSerials, matchSerials } from "./match-serials";

export interface RunFile extends MatchedSerials {
  readings: Reading[];
  /** What the rules say of the readings. @throws AppError `run.invalid` {errors, errorCount} where they contradict them */
  judge: () => Steps<Finding[]>;
}

export interface RunFileInput {
  lot: { id: string; code: string };
  rules: FamilyRules;
  purpose: Purpose;
  addDevices: boolean;
  bytes: Buffer;
}

/**
 * Reads an uploaded run and checks its cells and serials; the rules of section 2 are left to `judge`, which takes its time with a
 * large file. Where something is wrong already, all that is wrong is told at once.
 * @throws AppError `run.invalid` {errors, errorCount} naming row, column, code and message; `run.too_many_rows`
 */
export async function readRunFile(db: Db, input: RunFileInput): Promise<RunFile> {
  const parsed = await parseReadingsCsv(input.bytes);
  const errors = new RowErrorList();
  const matched = await matchSerials(db, input.lot, parsed.readings, input.addDevices, errors);
  const judge = function* () {
    const { errorCount, findings } = yield* judgeReadingsInSteps(input.rules, input.purpose, parsed, errors);
    if (errorCount > 0) throw invalid(errors, errorCount);
    return findings;
  };
  if (errors.total > 0 || parsed.errorCount > 0 || parsed.readings.length === 0) await inSlices(judge());
  return { readings: parsed.readings, judge, ...matched };
}

function invalid(errors: RowErrorList, errorCount: number): AppError {
  const count = errorCount === 1 ? "One error" : `${errorCount.toLocaleString("en")} errors`;
  const message = `${count} in the file; nothing was stored.`;
  return new AppError("run.invalid", { errors: errors.list(), errorCount, message });
}
