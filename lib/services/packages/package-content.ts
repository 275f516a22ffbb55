import type { PackageContent } from "@/builders/bundle/bundle";
import { imageLine } from "@/builders/bundle/images-jsonl";
import { sha256Hex } from "@/builders/bundle/sha256";
import { type CompiledLayout, compileLayout } from "@/builders/codec/compile-layout";
import { writeImageHex } from "@/builders/codec/hex-image";
import { decodeImage } from "@/builders/codec/image";
import type { Db } from "@/db/executor";
import { eachImages, type ImageRow, listDerivationsOfSets } from "@/db/queries/images";
import { getLayoutById } from "@/db/queries/layouts";
import { listPackageFiles } from "@/db/queries/package-provenance";
import { getPackageFile } from "@/db/queries/packages";
import { AppError } from "@/lib/errors";

/**
 * The bytes of a built package, made from its stored images and held against the digests of what was built, so that what the
 * code of today would write otherwise is refused instead of handed out. Making `images.jsonl` again takes a third of the time
 * of reading the stored one.
 * @throws AppError `package.not_built`, `package.bytes_differ` {path}
 */
export async function readPackageContent(db: Db, pkg: { id: string; layoutId: string }): Promise<PackageContent> {
  const manifest = await getPackageFile(db, pkg.id, "manifest.json");
  const layout = compileLayout((await getLayoutById(db, pkg.layoutId)).document);
  const hexes = new Map<string, string>();
  const lines: Buffer[] = [];
  for await (const images of eachImages(db, pkg.id)) {
    for (const image of images) hexes.set(image.serial, hexOf(layout, image));
    lines.push(await linesOf(db, layout, images));
  }
  const values = Buffer.concat(lines);
  await assertAsBuilt(db, pkg.id, "images.jsonl", values);
  return { manifest: manifest.content, values, hexes };
}

/** Lines of `images.jsonl`. */
async function linesOf(db: Db, layout: CompiledLayout, images: readonly ImageRow[]): Promise<Buffer> {
  const setIds = images.map((image) => image.coefficientSetId);
  const derivations = await listDerivationsOfSets(db, setIds);
  let lines = "";
  for (const { serial, sha256, bytes, coefficientSetId } of images) {
    const derivation = derivations.get(coefficientSetId) as string;
    const fields = decodeImage(layout, bytes);
    lines += imageLine({ serial, derivation, sha256: sha256.toString("hex"), fields });
  }
  return Buffer.from(lines);
}

async function assertAsBuilt(db: Db, packageId: string, name: string, content: Buffer): Promise<void> {
  const built = (await listPackageFiles(db, packageId)).find((file) => file.name === name);
  if (built?.sha256.toString("hex") !== sha256Hex(content)) throw bytesDiffer(name);
}

/** An image as Intel HEX. @throws AppError `package.bytes_differ` where it is not the text that was built */
export function hexOf(layout: CompiledLayout, image: ImageRow): string {
  const hex = writeImageHex(layout, image.bytes);
  if (sha256Hex(hex) === image.hexSha256.toString("hex")) return hex;
  throw bytesDiffer(`images/${image.serial}.hex`);
}

function bytesDiffer(path: string): AppError {
  const message = `${path} cannot be written as it was built. Nothing is handed out; report this with the package's id.`;
  return new AppError("package.bytes_differ", { path, message });
}
