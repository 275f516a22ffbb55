import type { CompiledLayout } from "@/builders/codec/compile-layout";
import { compareImages } from "@/builders/codec/difference";
import { checkChecksums } from "@/builders/codec/image";
import { getImage } from "@/db/queries/images";
import type { Ctx } from "@/lib/services/context";
import { layoutsOfPackages } from "@/lib/services/devices/layouts-of-packages";
import { getImageView } from "@/lib/services/packages/read-images";
import { memoryOf, readDumpFile, wrongShape } from "@/lib/services/trace/dump-file";
import type { FileComparison } from "@/schemas/api/compare";

/**
 * A file against one image of a package, read by that image's layout. Nothing is stored.
 * @param input bytes as Intel HEX, S-records, or raw memory from the base address on.
 * @throws AppError `package.not_found`, `package.not_built`, `image.not_found`, `hex.*` and `srec.*` with the line, `dump.*`
 */
export async function compareFile(
  ctx: Ctx,
  input: { package: string; serial: string; format: "hex" | "raw"; bytes: Buffer },
): Promise<FileComparison> {
  const image = await getImageView(ctx, input.package, input.serial);
  const layout = (await layoutsOfPackages(ctx.db, [image.package])).get(image.package) as CompiledLayout;
  const dump = readDumpFile(input);
  const bytes = memoryOf(layout, dump);
  if (!bytes) throw wrongShape(layout, dump);
  const stored = await getImage(ctx.db, image.package, image.serial);
  const found = compareImages({ layout, bytes: stored.bytes }, { layout, bytes });
  return {
    image,
    file: {
      bytes: Buffer.from(bytes).toString("hex"),
      checksums: checkChecksums(layout, bytes).map(({ name, ok }) => ({ name, ok })),
    },
    ...found,
  };
}
