import type { ReleaseRecord } from "@/builders/bundle/release";
import type { Db } from "@/db/executor";
import { type ApprovalRow, listApprovals } from "@/db/queries/approvals";
import { listWaivers } from "@/db/queries/checks";
import {
  listAcknowledgements,
  listDerivationFindings,
  listDerivationRunIds,
  listExclusions,
} from "@/db/queries/derivations";
import { listPackageDerivationIds } from "@/db/queries/package-inputs";
import { listPackageFiles } from "@/db/queries/package-provenance";
import type { PackageRow } from "@/db/queries/packages";
import { listRunEquipment } from "@/db/queries/runs";

export interface ReleaseFacts {
  sequence: number;
  kind: ReleaseRecord["kind"];
  reason: string | null;
  releasedAt: Date;
  keyId: string;
  /** Given where an earlier release goes live again. */
  reinstatementId?: string;
}

/**
 * Everything that `release.json` says about a package that goes live (contract, section 5) but the ledger's head, which is
 * known only once nobody else can append.
 */
export async function readReleaseFacts(
  db: Db,
  pkg: PackageRow,
  facts: ReleaseFacts,
): Promise<Omit<ReleaseRecord, "ledgerHead">> {
  const derivationIds = await listPackageDerivationIds(db, pkg.id);
  const files = await listPackageFiles(db, pkg.id);
  const sums = files.find((file) => file.name === "SHA256SUMS") as (typeof files)[number];
  const waivers = await listWaivers(db, pkg.id);
  return {
    format: "trimwright/release@1",
    lot: pkg.lotCode,
    version: pkg.version,
    package: (pkg.digest as Buffer).toString("hex"),
    sums: sums.sha256.toString("hex"),
    reviewDigest: (pkg.reviewDigest as Buffer).toString("hex"),
    sequence: facts.sequence,
    kind: facts.kind,
    reason: facts.reason,
    releasedAt: facts.releasedAt.toISOString(),
    approvals: await approvalsOf(db, pkg, facts.reinstatementId),
    coefficientApprovals: await perDerivation(derivationIds, async (derivation) =>
      granted(await listApprovals(db, "derivation", derivation)).map((one) => ({
        derivation,
        ...signatureOf(one),
        devices: one.serialCount,
      })),
    ),
    waivers: waivers.map(({ checkCode, personName, reason, at }) => ({
      check: checkCode,
      name: personName,
      reason,
      at: at.toISOString(),
    })),
    exclusions: await perDerivation(derivationIds, async (derivation) =>
      (await listExclusions(db, derivation)).map(({ serial, reason, personName }) => ({
        derivation,
        serial,
        reason,
        name: personName,
      })),
    ),
    acknowledgements: await perDerivation(derivationIds, (derivation) => acknowledgementsOf(db, derivation)),
    equipment: await equipmentOf(db, derivationIds),
    keyId: facts.keyId,
  };
}

async function perDerivation<T>(ids: readonly string[], list: (id: string) => Promise<T[]>): Promise<T[]> {
  const all: T[] = [];
  for (const id of ids) all.push(...(await list(id)));
  return all;
}

const granted = (approvals: readonly ApprovalRow[]) => approvals.filter((one) => one.decision === "approve");

function signatureOf({ personName, meaning, at }: ApprovalRow): ReleaseRecord["approvals"][number] {
  return { name: personName, role: "reviewer", meaning, at: at.toISOString() };
}

/** Approvals of what was submitted last, and of its going live again. */
async function approvalsOf(db: Db, pkg: PackageRow, reinstatementId?: string): Promise<ReleaseRecord["approvals"]> {
  const submittedAt = pkg.submittedAt as Date;
  const ofPackage = granted(await listApprovals(db, "package", pkg.id)).filter((one) => one.at >= submittedAt);
  const again = reinstatementId === undefined ? [] : await listApprovals(db, "reinstatement", reinstatementId);
  return [...ofPackage, ...granted(again)].map(signatureOf);
}

async function acknowledgementsOf(db: Db, derivation: string) {
  const given = await listAcknowledgements(db, derivation);
  if (given.length === 0) return [];
  const findings = new Map((await listDerivationFindings(db, derivation)).map((finding) => [finding.id, finding]));
  return given.map(({ findingId, personName, reason, at }) => ({
    derivation,
    finding: findings.get(findingId)?.code ?? findingId,
    serial: findings.get(findingId)?.serial ?? null,
    name: personName,
    reason,
    at: at.toISOString(),
  }));
}

/** Sensors, chambers, loads and readers behind the readings, with their certificates as of the run. */
async function equipmentOf(db: Db, derivationIds: readonly string[]) {
  const runIds = new Set<string>();
  for (const id of derivationIds) for (const run of await listDerivationRunIds(db, id)) runIds.add(run);
  const rows = await listRunEquipment(db, [...runIds].sort());
  return rows.map(({ runId, code, kind, certificate, calibratedUntil, uncertainty }) => ({
    run: runId,
    code,
    kind,
    certificate,
    calibratedUntil,
    uncertainty,
  }));
}
