import type { PackageContent } from "@/builders/bundle/bundle";
import { imageLine, imagesJsonl } from "@/builders/bundle/images-jsonl";
import { sha256Hex } from "@/builders/bundle/sha256";
import { type CompiledLayout, compileLayout } from "@/builders/codec/compile-layout";
import { decodeImage } from "@/builders/codec/image";
import { writeIntelHex } from "@/builders/codec/intel-hex-write";
import type { Db } from "@/db/executor";
import { eachImages, type ImageRow, listDerivationsOfImages } from "@/db/queries/images";
import { getLayoutById } from "@/db/queries/layouts";
import { getPackageFile } from "@/db/queries/packages";
import { AppError } from "@/lib/errors";

/**
 * The bytes of a built package, made from its stored images and held against their stored digests: whatever the code of today
 * would write otherwise is refused instead of handed out.
 * @throws AppError `package.not_built`, `package.bytes_differ` {path}
 */
export async function readPackageContent(db: Db, pkg: { id: string; layoutId: string }): Promise<PackageContent> {
  const manifest = await getPackageFile(db, pkg.id, "manifest.json");
  const layout = compileLayout((await getLayoutById(db, pkg.layoutId)).document);
  const derivations = await listDerivationsOfImages(db, pkg.id);
  const hexes = new Map<string, string>();
  const lines: string[] = [];
  for await (const images of eachImages(db, pkg.id)) {
    for (const image of images) {
      hexes.set(image.serial, hexOf(layout, image));
      lines.push(valuesLine(layout, image, derivations.get(image.coefficientSetId) as string));
    }
  }
  const values = imagesJsonl(lines);
  const { values: listed } = JSON.parse(manifest.content.toString("utf8")) as {
    values: { path: string; sha256: string };
  };
  if (sha256Hex(values) !== listed.sha256) throw bytesDiffer(listed.path);
  return { manifest: manifest.content, values, hexes };
}

/** An image as Intel HEX. @throws AppError `package.bytes_differ` where it is not the text that was built */
export function hexOf(layout: CompiledLayout, image: ImageRow): string {
  const hex = writeIntelHex(image.bytes, layout.baseAddress, layout.kept);
  if (sha256Hex(hex) !== image.hexSha256.toString("hex")) throw bytesDiffer(`images/${image.serial}.hex`);
  return hex;
}

function valuesLine(layout: CompiledLayout, image: ImageRow, derivation: string): string {
  const { serial, sha256, bytes } = image;
  return imageLine({ serial, derivation, sha256: sha256.toString("hex"), fields: decodeImage(layout, bytes) });
}

function bytesDiffer(path: string): AppError {
  return new AppError("package.bytes_differ", {
    path,
    message: `${path} cannot be written as it was built. Nothing is handed out; report this with the package's id.`,
  });
}
