import type { CompiledLayout } from "@/builders/codec/compile-layout";
import { compareImages } from "@/builders/codec/difference";
import { decodeImage } from "@/builders/codec/image";
import type { ImageBytesRow } from "@/db/queries/images";
import type { PackageRow } from "@/db/queries/packages";
import type { Ctx } from "@/lib/services/context";
import { layoutsOfPackages } from "@/lib/services/devices/layouts-of-packages";
import { getBuiltPackage } from "@/lib/services/packages/read-images";
import type { ComparedDevice, ComparedPackage } from "@/schemas/api/compare";
import { type PairedImages, pairImages } from "./paired-images";

/** A package of a comparison with its layout. */
export interface Side {
  pkg: PackageRow;
  layout: CompiledLayout;
}

export interface TwoPackages {
  from: Side;
  to: Side;
}

/** A serial as compared; `same` where no byte differs. */
export type DeviceDifference = Omit<ComparedDevice, "change"> & { change: ComparedDevice["change"] | "same" };

/** @throws AppError `package.not_found`, `package.not_built` */
export async function openTwoPackages(ctx: Ctx, fromId: string, toId: string): Promise<TwoPackages> {
  const packages = [await getBuiltPackage(ctx, fromId), await getBuiltPackage(ctx, toId)];
  const layouts = await layoutsOfPackages(ctx.db, [fromId, toId]);
  const [from, to] = packages.map((pkg) => ({ pkg, layout: layouts.get(pkg.id) })) as [Side, Side];
  return { from, to };
}

/** Every serial of either package in rising order, after one where it is given; some images are held at a time. */
export async function* eachDifference(
  ctx: Ctx,
  two: TwoPackages,
  options: { after?: string; size?: number } = {},
): AsyncGenerator<DeviceDifference> {
  const { from, to } = two;
  for await (const pair of pairImages(ctx.db, from.pkg.id, to.pkg.id, options)) yield differenceOf(two, pair);
}

/** What differs for one serial. */
export function differenceOf({ from, to }: TwoPackages, pair: PairedImages): DeviceDifference {
  const { serial } = pair;
  if (!pair.from) return { serial, change: "added", fields: fieldsOf(to, pair.to as ImageBytesRow, "to"), bytes: [] };
  if (!pair.to) return { serial, change: "removed", fields: fieldsOf(from, pair.from, "from"), bytes: [] };
  const older = { layout: from.layout, bytes: pair.from.bytes };
  return { serial, ...compareImages(older, { layout: to.layout, bytes: pair.to.bytes }) };
}

/** All fields of an image whose serial the other package lacks. */
function fieldsOf({ layout }: Side, image: ImageBytesRow, side: "from" | "to"): ComparedDevice["fields"] {
  const none = { from: null, to: null, steps: null };
  return decodeImage(layout, image.bytes).map(({ name, unit, value }) => ({ name, unit, ...none, [side]: value }));
}

/** A package as a comparison names it. */
export function comparedPackage({ pkg }: Side): ComparedPackage {
  const { id, lotCode, familyCode, version, layoutVersion, state, digest } = pkg;
  return {
    id,
    lot: lotCode,
    family: familyCode,
    version,
    layout: layoutVersion,
    state,
    digest: digest?.toString("hex") ?? null,
  };
}
