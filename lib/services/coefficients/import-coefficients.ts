import { derivationDigest } from "@/builders/bundle/manifest";
import { sha256Hex } from "@/builders/bundle/sha256";
import type { Db } from "@/db/executor";
import { insertSets, listSetValues } from "@/db/queries/coefficients";
import {
  type DerivationState,
  finishDerivation,
  insertDerivation,
  insertDerivationFindings,
  insertImportFile,
  listDerivationsOfLot,
} from "@/db/queries/derivations";
import { listAllDevices } from "@/db/queries/devices";
import { getLot, type LotRow } from "@/db/queries/lots";
import { insertMakers } from "@/db/queries/makers";
import { type DerivedBefore, listImportFindings } from "@/lib/domain/compensation/import-findings";
import type { Coefficients, FamilyRules } from "@/lib/domain/compensation/types";
import { parseCoefficientsCsv } from "@/lib/domain/readings/parse-coefficients-csv";
import { RowErrorList } from "@/lib/domain/readings/row-error-list";
import { AppError } from "@/lib/errors";
import { assertRole, type PersonCtx } from "@/lib/services/context";
import { getDerivationView } from "@/lib/services/derivations/get-derivation";
import { tellDeciders } from "@/lib/services/derivations/tell-people";
import { appendEvent } from "@/lib/services/ledger/append-event";
import { getLotRules } from "@/lib/services/lots/lot-rules";
import type { DerivationView } from "@/schemas/api/derivations";

export interface ImportInput {
  lot: string;
  /** What the values rest on; both have to be the family's. */
  referenceC: number;
  capacityKg: number;
  bytes: Buffer;
}

/** States of a derivation whose values have something to say. */
const DERIVED: readonly DerivationState[] = ["proposed", "approved", "partly-approved"];

/**
 * Takes coefficients that were found elsewhere into a lot, as a derivation with method import that a second person decides.
 * @throws AppError `lot.not_found`, `coefficients.reference_differs` {referenceC, capacityKg}, `coefficients.invalid`
 * {errors, errorCount}; nothing is then stored
 */
export async function importCoefficients(ctx: PersonCtx, input: ImportInput): Promise<DerivationView> {
  assertRole(ctx, "engineer");
  const lot = await getLot(ctx.db, input.lot);
  const { revision, rules } = await getLotRules(ctx.db, lot);
  assertSameBase(input, rules);
  const { parsed, deviceIds } = await readFile(ctx, lot, input.bytes);
  const id = ctx.newId();
  const fileSha256 = sha256Hex(input.bytes);
  // There is no arithmetic of ours behind the values: the file stands in its place, so that the digest binds it.
  const engine = `import:${fileSha256}`;
  const family = { code: lot.familyCode, revision: revision.number, sha256: revision.sha256.toString("hex") };
  const sha256 = derivationDigest({ method: "import", order: parsed.order, family, runs: [], exclude: [], engine });
  const before = await findDerivedBefore(ctx.db, lot.id);
  const findings = listImportFindings(parsed.sets, rules, before).map((one) => ({ ...one, id: ctx.newId() }));
  const sets = parsed.sets.map(({ serial, coefficients }) => ({
    id: ctx.newId(),
    deviceId: deviceIds.get(serial) as string,
    role: "imported" as const,
    coefficients,
    detail: {},
  }));
  const at = ctx.now();
  const count = sets.length;
  await ctx.db.transaction().execute(async (trx) => {
    await insertDerivation(trx, {
      id,
      lotId: lot.id,
      familyRevisionId: revision.id,
      method: "import",
      order: parsed.order,
      engine,
      sha256: Buffer.from(sha256, "hex"),
      runIds: [],
      exclusions: [],
      progressTotal: count,
      createdAt: at,
      createdBy: ctx.actor.id,
    });
    await insertImportFile(trx, id, Buffer.from(fileSha256, "hex"), input.bytes);
    await insertMakers(trx, [
      { id: ctx.newId(), subjectKind: "derivation", subjectId: id, personId: ctx.actor.id, act: "imported", at },
    ]);
    await insertSets(trx, id, sets, at);
    await insertDerivationFindings(trx, id, findings);
    const bySeverity = { hard: 0, soft: findings.filter((one) => one.severity === "soft").length, note: 0 };
    bySeverity.note = findings.length - bySeverity.soft;
    const counts = { devices: count, withValues: count, roles: { imported: count }, findings: bySeverity };
    await finishDerivation(trx, id, {
      provenRange: null,
      pooled: null,
      verification: [],
      uncertainty: null,
      envelope: null,
      counts,
      progressTotal: count,
      finishedAt: at,
    });
    const told = { id, lotCode: lot.code, createdByName: ctx.actor.name };
    await tellDeciders(ctx, trx, told, { devices: count, toAcknowledge: bySeverity.soft, blocked: false });
    await appendEvent(ctx, trx, {
      action: "coefficients.imported",
      subject: id,
      data: { lot: lot.code, order: parsed.order, sha256, file: fileSha256, devices: count },
    });
  });
  return getDerivationView(ctx, id);
}

function assertSameBase({ referenceC, capacityKg }: ImportInput, rules: FamilyRules): void {
  if (referenceC === rules.referenceC && capacityKg === rules.capacityKg) return;
  throw new AppError("coefficients.reference_differs", {
    referenceC: rules.referenceC,
    capacityKg: rules.capacityKg,
    message: `The family's values rest on ${rules.referenceC} °C and ${rules.capacityKg} kg; coefficients for another base can't be taken.`,
  });
}

async function readFile(ctx: PersonCtx, lot: LotRow, bytes: Buffer) {
  const parsed = parseCoefficientsCsv(bytes);
  const deviceIds = new Map((await listAllDevices(ctx.db, lot.id)).map((device) => [device.serial, device.id]));
  const errors = new RowErrorList();
  for (const { row, serial } of parsed.sets) {
    if (deviceIds.has(serial)) continue;
    errors.add({ row, column: "serial", code: "device.unknown", message: `${serial} is not in lot ${lot.code}.` });
  }
  for (const error of parsed.errors) errors.add(error);
  const errorCount = errors.total + parsed.errorCount - parsed.errors.length;
  if (errorCount === 0) return { parsed, deviceIds };
  const message = `${errorCount === 1 ? "One error" : `${errorCount.toLocaleString("en")} errors`} in the file; nothing was stored.`;
  throw new AppError("coefficients.invalid", { errors: errors.list(), errorCount, message });
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
