import { sha256Hex } from "@/builders/bundle/sha256";
import { findNewestRelease } from "@/db/queries/live-periods";
import { AppError } from "@/lib/errors";
import type { Ctx } from "@/lib/services/context";

/** `release.json` as it was signed; lists have the members that `makeReleaseRecord` gives them. */
export interface ReleaseDocument {
  lot: string;
  version: string;
  package: string;
  sums: string;
  reviewDigest: string;
  sequence: number;
  kind: "release" | "reinstatement";
  reason: string | null;
  releasedAt: string;
  approvals: { name: string; role: string; meaning: string; at: string }[];
  coefficientApprovals: { derivation: string; name: string; meaning: string; at: string; devices: number | null }[];
  waivers: { check: string; name: string; reason: string; at: string }[];
  exclusions: { derivation: string; serial: string; reason: string; name: string }[];
  acknowledgements: { finding: string; serial: string | null; name: string; reason: string; at: string }[];
  equipment: { run: string; code: string; kind: string; certificate: string; calibratedUntil: string }[];
  ledgerHead: string;
  keyId: string;
}

/** The signed record of the newest time that a package went live. */
export interface ReleaseRecordView {
  document: ReleaseDocument;
  /** SHA-256 of `release.json`. */
  sha256: string;
  /** Ed25519 over it, lower-case hex. */
  signature: string;
}

/** What was signed when a package went live last. @throws AppError `release.not_found` where it never did */
export async function getReleaseRecord(ctx: Ctx, packageId: string): Promise<ReleaseRecordView> {
  const period = await findNewestRelease(ctx.db, packageId);
  if (!period?.releaseDocument || !period.signature) {
    throw new AppError("release.not_found", { message: "This package has never been live: there is no record of it." });
  }
  return {
    document: JSON.parse(period.releaseDocument.toString("utf8")) as ReleaseDocument,
    sha256: sha256Hex(period.releaseDocument),
    signature: period.signature.toString("hex"),
  };
}
