import { checkRun, type RowError } from "@/lib/domain/compensation/run-checks";
import type { FamilyRules, Finding, Purpose, Reading } from "@/lib/domain/compensation/types";
import { finish, forEachInSteps, mapInSteps, type Steps } from "@/lib/domain/steps";
import type { ParsedReadings } from "./gather-readings";
import type { RowErrorList } from "./row-error-list";

/** How many errors there are in all, and what there is to know where there are none. */
interface Judged {
  errorCount: number;
  findings: Finding[];
}

/**
 * Holds the readings of a file against the rules of section 2 and each other. With an error there are no findings.
 * @param errors takes what is wrong besides what was known before, and then what the file's reading met.
 * @returns how many errors there are in all
 */
export function judgeReadings(
  rules: FamilyRules,
  purpose: Purpose,
  parsed: ParsedReadings,
  errors: RowErrorList,
): Judged {
  return finish(judgeReadingsInSteps(rules, purpose, parsed, errors));
}

/** {@link judgeReadings} for a process that serves others meanwhile. */
export function* judgeReadingsInSteps(
  rules: FamilyRules,
  purpose: Purpose,
  parsed: ParsedReadings,
  errors: RowErrorList,
): Steps<Judged> {
  const { errors: contradictions, findings } = yield* checkRun(rules, purpose, parsed.readings);
  const isCertain = yield* certainty(parsed);
  yield* forEachInSteps(contradictions, (error) => {
    if (isCertain(error)) errors.add(error);
  });
  for (const error of parsed.errors) errors.add(error);
  const errorCount = errors.total + parsed.errorCount - parsed.errors.length;
  return { errorCount, findings: errorCount > 0 ? [] : findings };
}

/**
 * Tells what follows from the readings from what may come of the rows that could not be read: a missing unloaded reading is no
 * finding of its own where the row that could be it is named as wrong already.
 */
function* certainty({ badRows, errorCount, readings }: ParsedReadings): Steps<(error: RowError) => boolean> {
  if (errorCount === 0) return () => true;
  // Parts that could not be read of a bad row stand for any value: the key has a blank there.
  const key = (serial: string | undefined, point: number | undefined) => `${serial ?? ""} ${point ?? ""}`;
  const bad = new Set(yield* mapInSteps(badRows, ({ serial, point }) => key(serial, point)));
  const byRow = new Map<number, Reading>();
  if (badRows.length > 0) yield* forEachInSteps(readings, (reading) => byRow.set(reading.row, reading));
  return ({ code, row }) => {
    if (code === "run.empty") return false;
    if (code !== "reading.loaded_without_unloaded") return true;
    const { serial, point } = byRow.get(row) ?? {};
    if (serial === undefined) return false;
    return ![key(serial, point), key(serial, undefined), key(undefined, point), key(undefined, undefined)].some((one) =>
      bad.has(one),
    );
  };
}
