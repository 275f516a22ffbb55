import type { Db } from "@/db/executor";
import { BUNDLE_CHUNK_BYTES, type BundleRow, findBundleChunk } from "@/db/queries/bundles";
import { getPackage, getPackageFile, type PackageRow } from "@/db/queries/packages";
import { AppError } from "@/lib/errors";
import type { Ctx } from "@/lib/services/context";
import { heldBytes, type StoredBytes } from "@/lib/services/stored-bytes";
import { assembleBundle } from "./assemble-bundle";

/**
 * The bundle of a package: signed where it is or was live, else a preview. That of a withdrawn package is for auditors only.
 * @throws AppError `package.not_found`, `package.not_built`, `package.withdrawn`
 */
export async function getBundle(ctx: Ctx, packageId: string): Promise<StoredBytes> {
  const pkg = await getPackage(ctx.db, packageId);
  if (pkg.state === "withdrawn" && !isAuditor(ctx)) {
    throw new AppError("package.withdrawn", {
      message: `Package ${pkg.version} of lot ${pkg.lotCode} was withdrawn; only auditors may still have its bundle.`,
    });
  }
  return storedBundle(ctx, pkg);
}

/** The bundle of a package whoever may have it. @throws AppError `package.not_built` */
export async function storedBundle(ctx: Ctx, pkg: PackageRow): Promise<StoredBytes> {
  const bundle = await assembleBundle(ctx, pkg.id);
  return {
    length: bundle.byteCount,
    sha256: bundle.sha256.toString("hex"),
    mediaType: "application/zip",
    fileName: `${pkg.lotCode}-${pkg.version}${bundle.sequence === 0 ? "-preview" : ""}.zip`,
    read: (range) => readChunks(ctx.db, bundle, range),
  };
}

/** `manifest.json` of a package; its SHA-256 is the package digest. @throws AppError `package.not_found`, `package.not_built` */
export async function getManifest(ctx: Ctx, packageId: string): Promise<StoredBytes> {
  const pkg = await getPackage(ctx.db, packageId);
  const file = await getPackageFile(ctx.db, packageId, "manifest.json");
  return heldBytes(file.content, {
    sha256: file.sha256.toString("hex"),
    mediaType: "application/json",
    fileName: `${pkg.lotCode}-${pkg.version}-manifest.json`,
  });
}

function isAuditor({ actor }: Ctx): boolean {
  return actor.kind === "person" && actor.roles.includes("auditor");
}

/** One stored piece at a time, cut to the range; both ends are inclusive. */
async function* readChunks(db: Db, bundle: BundleRow, range: { first: number; last: number }) {
  const lastPosition = Math.floor(range.last / BUNDLE_CHUNK_BYTES);
  for (let position = Math.floor(range.first / BUNDLE_CHUNK_BYTES); position <= lastPosition; position++) {
    const chunk = await findBundleChunk(db, bundle.packageId, bundle.sequence, position);
    if (chunk === undefined) throw new Error(`piece ${position} of the bundle of ${bundle.packageId} is gone`);
    const start = position * BUNDLE_CHUNK_BYTES;
    yield chunk.subarray(Math.max(0, range.first - start), Math.min(chunk.length, range.last - start + 1));
  }
}
