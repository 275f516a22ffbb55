import { sha256Hex } from "@/builders/bundle/sha256";
import type { Db } from "@/db/executor";
import { listChecks, listWaivers } from "@/db/queries/checks";
import { findLivePackage, type PackageRow } from "@/db/queries/packages";
import { canonicalJson } from "@/lib/domain/canonical-json";

export interface UnderReview {
  /** SHA-256 of the RFC 8785 form of what a reviewer decides over, lower-case hex (contract, section 6). */
  reviewDigest: Buffer;
  /** Digest of the package that is live now; null where none is. */
  against: Buffer | null;
}

/**
 * What a decision over a built package would be about now: its content, checks and waivers, and what it would replace.
 * A change of any of these gives another digest.
 */
export async function reviewDigestOf(db: Db, pkg: PackageRow): Promise<UnderReview> {
  const checks = await listChecks(db, pkg.id);
  const waivers = await listWaivers(db, pkg.id);
  const against = (await findLivePackage(db, pkg.lotId))?.digest ?? null;
  const digest = sha256Hex(
    canonicalJson({
      package: pkg.digest?.toString("hex") ?? null,
      checks: checks.map(({ code, verdict, message, evidence }) => ({ code, verdict, message, evidence })),
      waivers: waivers.map(({ checkCode, personId, reason, at }) => ({
        check: checkCode,
        person: personId,
        reason,
        at: at.toISOString(),
      })),
      against: against?.toString("hex") ?? null,
    }),
  );
  return { reviewDigest: Buffer.from(digest, "hex"), against };
}
