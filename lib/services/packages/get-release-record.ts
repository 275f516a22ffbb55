import type { ReleaseRecord } from "@/builders/bundle/release";
import { sha256Hex } from "@/builders/bundle/sha256";
import { findNewestRelease } from "@/db/queries/live-periods";
import { AppError } from "@/lib/errors";
import type { Ctx } from "@/lib/services/context";

export type { ReleaseRecord };

/** The signed record of the newest time that a package went live. */
export interface ReleaseRecordView {
  /** `release.json` as it was signed. */
  document: ReleaseRecord;
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
    document: JSON.parse(period.releaseDocument.toString("utf8")) as ReleaseRecord,
    sha256: sha256Hex(period.releaseDocument),
    signature: period.signature.toString("hex"),
  };
}
