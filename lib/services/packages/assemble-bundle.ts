import { createHash } from "node:crypto";
import { previewFiles, releasedFiles } from "@/builders/bundle/bundle";
import { cutPieces } from "@/builders/bundle/pieces";
import { zipPieces } from "@/builders/bundle/zip";
import type { Db, Trx } from "@/db/executor";
import * as query from "@/db/queries/bundles";
import { findNewestRelease, type LivePeriodRow } from "@/db/queries/live-periods";
import { getPackage, type PackageRow } from "@/db/queries/packages";
import { getSigningKey } from "@/db/queries/signing-keys";
import type { Ctx } from "@/lib/services/context";
import { readPackageContent } from "./package-content";

/** Sequence under which a preview's pieces are stored; releases begin at 1. */
const PREVIEW = 0;

/**
 * The stored bundle of a package as it stands: of its newest release, or a preview where it never was released. Made here where
 * nobody made it yet; whoever asks meanwhile waits for that one.
 * @throws AppError `package.not_found`, `package.not_built`, `package.bytes_differ`
 */
export async function assembleBundle(ctx: Ctx, packageId: string): Promise<query.BundleRow> {
  const release = await findNewestRelease(ctx.db, packageId);
  const sequence = release?.sequence ?? PREVIEW;
  const stored = await query.findBundle(ctx.db, packageId, sequence);
  if (stored) return stored;
  return ctx.db.transaction().execute(async (trx) => {
    await query.lockBundleMaking(trx, packageId, sequence);
    const meanwhile = await query.findBundle(trx, packageId, sequence);
    return meanwhile ?? makeBundle(trx, await getPackage(trx, packageId), release, ctx.now());
  });
}

async function makeBundle(
  trx: Trx,
  pkg: PackageRow,
  release: LivePeriodRow | undefined,
  madeAt: Date,
): Promise<query.BundleRow> {
  const sequence = release?.sequence ?? PREVIEW;
  const files = await bundleFiles(trx, pkg, release);
  const digest = createHash("sha256");
  let byteCount = 0;
  let position = 0;
  for (const piece of cutPieces(zipPieces(files), query.BUNDLE_CHUNK_BYTES)) {
    digest.update(piece);
    byteCount += piece.length;
    await query.insertBundleChunk(trx, {
      packageId: pkg.id,
      sequence,
      position: position++,
      content: Buffer.from(piece),
    });
  }
  const bundle = { packageId: pkg.id, sequence, byteCount, sha256: digest.digest(), madeAt };
  await query.insertBundle(trx, bundle);
  return bundle;
}

async function bundleFiles(db: Db, pkg: PackageRow, release: LivePeriodRow | undefined) {
  const content = await readPackageContent(db, pkg);
  if (!release?.releaseDocument || !release.signature || !release.keyId) {
    return previewFiles(content, { lot: pkg.lotCode, version: pkg.version });
  }
  const { publicPem } = await getSigningKey(db, release.keyId);
  return releasedFiles(content, {
    release: release.releaseDocument,
    signature: release.signature,
    publicKeyPem: publicPem,
  });
}
