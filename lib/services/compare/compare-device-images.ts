import type { z } from "zod";
import type { CompiledLayout } from "@/builders/codec/compile-layout";
import { compareImages as differences } from "@/builders/codec/difference";
import { getImage } from "@/db/queries/images";
import type { Ctx } from "@/lib/services/context";
import { layoutsOfPackages } from "@/lib/services/devices/layouts-of-packages";
import { getImageView } from "@/lib/services/packages/read-images";
import type { compareImagesQuery, imageComparison } from "@/schemas/api/compare";

/**
 * Two images side by side, of one serial in two packages or of two serials, and what differs between them.
 * @throws AppError `package.not_found`, `package.not_built`, `image.not_found`
 */
export async function compareDeviceImages(
  ctx: Ctx,
  input: z.output<typeof compareImagesQuery>,
): Promise<z.input<typeof imageComparison>> {
  const toSerial = input.toSerial ?? input.serial;
  const from = await getImageView(ctx, input.from, input.serial);
  const to = await getImageView(ctx, input.to, toSerial);
  const layouts = await layoutsOfPackages(ctx.db, [from.package, to.package]);
  const older = await getImage(ctx.db, from.package, from.serial);
  const newer = await getImage(ctx.db, to.package, to.serial);
  const found = differences(
    { layout: layouts.get(from.package) as CompiledLayout, bytes: older.bytes },
    { layout: layouts.get(to.package) as CompiledLayout, bytes: newer.bytes },
  );
  return { from, to, ...found };
}
