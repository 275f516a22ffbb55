import { derivationDigest } from "@/builders/bundle/manifest";
import { sha256InSteps } from "@/builders/bundle/sha256";
import {
  finishDerivation,
  insertDerivation,
  insertDerivationFindings,
  insertImportFile,
} from "@/db/queries/derivations";
import { insertMakers } from "@/db/queries/makers";
import { insertSets, type NewSet } from "@/db/queries/new-coefficients";
import { mapInSteps, type Steps } from "@/lib/domain/steps";
import { AppError } from "@/lib/errors";
import type { PersonCtx } from "@/lib/services/context";
import { getDerivationView } from "@/lib/services/derivations/get-derivation";
import { tellDeciders } from "@/lib/services/derivations/tell-people";
import { inSlices } from "@/lib/services/in-slices";
import { appendEvent } from "@/lib/services/ledger/append-event";
import type { DerivationView } from "@/schemas/api/derivations";
import { type ImportInput, type ImportPlan, planImport } from "./plan-import";

/**
 * Takes coefficients that were found elsewhere into a lot, as a derivation with method import that a second person decides.
 * @throws AppError `lot.not_found`, `coefficients.reference_differs` {referenceC, capacityKg}, `coefficients.invalid`
 * {errors, errorCount}; nothing is then stored
 */
export async function importCoefficients(ctx: PersonCtx, input: ImportInput): Promise<DerivationView> {
  const { lot, revision, parsed, deviceIds, errors, errorCount, ...plan } = await planImport(ctx, input);
  if (errorCount > 0) {
    const message = `${errorCount === 1 ? "One error" : `${errorCount.toLocaleString("en")} errors`} in the file; nothing was stored.`;
    throw new AppError("coefficients.invalid", { errors, errorCount, message });
  }
  const id = ctx.newId();
  const fileSha256 = (await inSlices(sha256InSteps(input.bytes))).toString("hex");
  // There is no arithmetic of ours behind the values: the file stands in its place, so that the digest binds it.
  const engine = `import:${fileSha256}`;
  const family = { code: lot.familyCode, revision: revision.number, sha256: revision.sha256.toString("hex") };
  const sha256 = derivationDigest({ method: "import", order: parsed.order, family, runs: [], exclude: [], engine });
  const findings = plan.findings.map((one) => ({ ...one, id: ctx.newId() }));
  const sets = await inSlices(newSets(ctx, parsed, deviceIds));
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

const newSets = (ctx: PersonCtx, parsed: ImportPlan["parsed"], deviceIds: ImportPlan["deviceIds"]): Steps<NewSet[]> =>
  mapInSteps(parsed.sets, ({ serial, coefficients }) => ({
    id: ctx.newId(),
    deviceId: deviceIds.get(serial) as string,
    role: "imported",
    coefficients,
    detail: {},
  }));
