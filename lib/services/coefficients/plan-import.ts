import type { Db } from "@/db/executor";
import { listSetValues } from "@/db/queries/coefficients";
import { type DerivationState, listDerivationsOfLot } from "@/db/queries/derivations";
import { findDeviceIds } from "@/db/queries/devices";
import type { FamilyRevisionRow } from "@/db/queries/families";
import { getLot, type LotRow } from "@/db/queries/lots";
import { type DerivedBefore, listImportFindings } from "@/lib/domain/compensation/import-findings";
import type { RowError } from "@/lib/domain/compensation/run-checks";
import type { Coefficients, FamilyRules, Finding } from "@/lib/domain/compensation/types";
import { type ParsedCoefficients, parseCoefficientsCsv } from "@/lib/domain/readings/parse-coefficients-csv";
import { RowErrorList } from "@/lib/domain/readings/row-error-list";
import { forEachInSteps, type Steps } from "@/lib/domain/steps";
import { AppError } from "@/lib/errors";
import { assertRole, type PersonCtx } from "@/lib/services/context";
import { inSlices } from "@/lib/services/in-slices";
import { getLotRules } from "@/lib/services/lots/lot-rules";

export interface ImportInput {
  lot: string;
  /** What the values rest on; both have to be the family's. */
  referenceC: number;
  capacityKg: number;
  bytes: Buffer;
}

/** A file of coefficients as far as it can be judged without storing anything. */
export interface ImportPlan {
  lot: LotRow;
  revision: FamilyRevisionRow;
  parsed: ParsedCoefficients;
  /** Device by serial, of those of the file that the lot has. */
  deviceIds: ReadonlyMap<string, string>;
  findings: Finding[];
  /** At most 200 of `errorCount`. */
  errors: RowError[];
  errorCount: number;
}

/** States of a derivation whose values have something to say. */
const DERIVED: readonly DerivationState[] = ["proposed", "approved", "partly-approved"];

/** Reads and judges a file of coefficients. @throws AppError `lot.not_found`, `coefficients.reference_differs` */
export async function planImport(ctx: PersonCtx, input: ImportInput): Promise<ImportPlan> {
  assertRole(ctx, "engineer");
  const lot = await getLot(ctx.db, input.lot);
  const { revision, rules } = await getLotRules(ctx.db, lot);
  assertSameBase(input, rules);
  const parsed = await inSlices(parseCoefficientsCsv(input.bytes));
  const serials = parsed.sets.map(({ serial }) => serial);
  const deviceIds = await findDeviceIds(ctx.db, lot.id, serials);
  const errors = await inSlices(unknownSerials(parsed, deviceIds, lot.code));
  for (const error of parsed.errors) errors.add(error);
  const errorCount = errors.total + parsed.errorCount - parsed.errors.length;
  const derived = await findDerivedBefore(ctx.db, lot.id);
  const findings = await inSlices(listImportFindings(parsed.sets, rules, derived));
  return { lot, revision, parsed, deviceIds, findings, errors: errors.list(), errorCount };
}

function* unknownSerials(
  { sets }: ParsedCoefficients,
  known: ReadonlyMap<string, string>,
  lot: string,
): Steps<RowErrorList> {
  const errors = new RowErrorList();
  yield* forEachInSteps(sets, ({ row, serial }) => {
    if (known.has(serial)) return;
    errors.add({ row, column: "serial", code: "device.unknown", message: `${serial} is not in lot ${lot}.` });
  });
  return errors;
}

function assertSameBase({ referenceC, capacityKg }: ImportInput, rules: FamilyRules): void {
  if (referenceC === rules.referenceC && capacityKg === rules.capacityKg) return;
  throw new AppError("coefficients.reference_differs", {
    referenceC: rules.referenceC,
    capacityKg: rules.capacityKg,
    message: `The family's values rest on ${rules.referenceC} °C and ${rules.capacityKg} kg; coefficients for another base can't be taken.`,
  });
}

/** Sets of the lot's newest derivation from readings; null where there is none. */
async function findDerivedBefore(db: Db, lotId: string): Promise<DerivedBefore | null> {
  const derivation = (await listDerivationsOfLot(db, lotId)).find(
    ({ method, state }) => method !== "import" && DERIVED.includes(state),
  );
  if (!derivation) return null;
  const values = new Map<string, Coefficients>();
  for (const { serial, coefficients } of await listSetValues(db, derivation.id))
    if (coefficients) values.set(serial, coefficients);
  return { values, pooled: derivation.pooled };
}
