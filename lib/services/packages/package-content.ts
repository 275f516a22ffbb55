import type { PackageContent } from "@/builders/bundle/bundle";
import { sha256Hex } from "@/builders/bundle/sha256";
import { type CompiledLayout, compileLayout } from "@/builders/codec/compile-layout";
import { writeIntelHex } from "@/builders/codec/intel-hex-write";
import type { Db } from "@/db/executor";
import { eachImages, type ImageRow } from "@/db/queries/images";
import { getLayoutById } from "@/db/queries/layouts";
import { getPackageFile } from "@/db/queries/packages";
import { AppError } from "@/lib/errors";

/**
 * The bytes of a built package: its stored files, and its images as HEX held against their stored digests, so that what the
 * code of today would write otherwise is refused instead of handed out.
 * @throws AppError `package.not_built`, `package.bytes_differ` {path}
 */
export async function readPackageContent(db: Db, pkg: { id: string; layoutId: string }): Promise<PackageContent> {
  const manifest = await getPackageFile(db, pkg.id, "manifest.json");
  const values = await getPackageFile(db, pkg.id, "images.jsonl");
  const layout = compileLayout((await getLayoutById(db, pkg.layoutId)).document);
  const hexes = new Map<string, string>();
  for await (const images of eachImages(db, pkg.id)) {
    for (const image of images) hexes.set(image.serial, hexOf(layout, image));
  }
  return { manifest: manifest.content, values: values.content, hexes };
}

/** An image as Intel HEX. @throws AppError `package.bytes_differ` where it is not the text that was built */
export function hexOf(layout: CompiledLayout, image: ImageRow): string {
  const hex = writeIntelHex(image.bytes, layout.baseAddress, layout.kept);
  if (sha256Hex(hex) === image.hexSha256.toString("hex")) return hex;
  const path = `images/${image.serial}.hex`;
  throw new AppError("package.bytes_differ", {
    path,
    message: `${path} cannot be written as it was built. Nothing is handed out; report this with the package's id.`,
  });
}
