import { sha256Hex } from "@/builders/bundle/sha256";
import { type CompiledLayout, compileLayout } from "@/builders/codec/compile-layout";
import { writeImageSRecords } from "@/builders/codec/files/hex-image";
import { toHex } from "@/builders/codec/files/hex-text";
import { checkChecksums, decodeImage } from "@/builders/codec/image";
import { type Extent, listExtents, listGaps } from "@/builders/codec/memory-map";
import { getImage, type ImageRow, listDerivationsOfSets, listImages as listImageRows } from "@/db/queries/images";
import { getLayoutById } from "@/db/queries/layouts";
import { getPackage, type PackageRow } from "@/db/queries/packages";
import { AppError } from "@/lib/errors";
import type { Ctx } from "@/lib/services/context";
import { type Page, pageOf } from "@/lib/services/page";
import { heldBytes, type StoredBytes } from "@/lib/services/stored-bytes";
import type { DecodedFieldView, ImageQuery, ImageSummary, ImageView } from "@/schemas/api/images";
import { hexOf } from "./package-content";

/** A package that has images. @throws AppError `package.not_found`, `package.not_built` */
export async function getBuiltPackage(ctx: Ctx, packageId: string): Promise<PackageRow> {
  const pkg = await getPackage(ctx.db, packageId);
  if (pkg.state !== "building" && pkg.state !== "failed") return pkg;
  const message = pkg.state === "building" ? "The package is still building." : "The build of this package failed.";
  throw new AppError("package.not_built", { state: pkg.state, message });
}

/** Images of a package by serial, decoded where asked for. @throws AppError `package.not_found`, `package.not_built` */
export async function listImages(ctx: Ctx, input: ImageQuery & { package: string }): Promise<Page<ImageSummary>> {
  const pkg = await getBuiltPackage(ctx, input.package);
  const { limit, cursor, search } = input;
  const rows = await listImageRows(ctx.db, pkg.id, { limit: limit + 1, cursor, search });
  const { items, next } = pageOf(rows, limit, (row) => row.serial);
  const derivations = await derivationsOf(ctx, items);
  if (input.values === "false") return { items: items.map((row) => factsOf(row, derivations)), next };
  const layout = await layoutOf(ctx, pkg);
  return { items: items.map((row) => ({ ...factsOf(row, derivations), fields: fieldsOf(layout, row.bytes) })), next };
}

/** One device's image, decoded, with the map of its memory. @throws AppError `package.not_found`, `package.not_built`, `image.not_found` */
export async function getImageView(ctx: Ctx, packageId: string, serial: string): Promise<ImageView> {
  const { pkg, row, layout } = await openImage(ctx, packageId, serial);
  const { document } = layout;
  const extents = listExtents(document);
  return {
    ...factsOf(row, await derivationsOf(ctx, [row])),
    package: pkg.id,
    version: pkg.version,
    lot: pkg.lotCode,
    family: pkg.familyCode,
    layout: document.version,
    bytes: toHex(row.bytes),
    baseAddress: layout.baseAddress,
    fill: layout.fill,
    pageBytes: document.memory.pageBytes,
    kept: layout.kept,
    gaps: listGaps(extents, layout.bytes),
    extents: extents.map((extent) => extentOf(layout, extent)),
    fields: fieldsOf(layout, row.bytes),
    checksums: checkChecksums(layout, row.bytes).map(({ name, ok }) => ({ name, ok })),
  };
}

/** One device's image as an Intel HEX file, the very text of the bundle. @throws AppError as {@link getImageView} */
export async function getImageHex(ctx: Ctx, packageId: string, serial: string): Promise<StoredBytes> {
  const { pkg, row, layout } = await openImage(ctx, packageId, serial);
  return heldBytes(Buffer.from(hexOf(layout, row)), {
    sha256: row.hexSha256.toString("hex"),
    mediaType: "text/x-intel-hex",
    fileName: `${row.serial}-${pkg.version}.hex`,
  });
}

/** One device's image as S-records: the bytes of the HEX at the same addresses. @throws AppError as {@link getImageView} */
export async function getImageSRecords(ctx: Ctx, packageId: string, serial: string): Promise<StoredBytes> {
  const { pkg, row, layout } = await openImage(ctx, packageId, serial);
  const text = Buffer.from(writeImageSRecords(layout, row.bytes), "latin1");
  return heldBytes(text, {
    sha256: sha256Hex(text),
    mediaType: "text/x-motorola-srecord",
    fileName: `${row.serial}-${pkg.version}.srec`,
  });
}

/** One device's image as it lies in memory; kept ranges are fill. @throws AppError as {@link getImageView} */
export async function getImageBytes(ctx: Ctx, packageId: string, serial: string): Promise<StoredBytes> {
  const { pkg, row } = await openImage(ctx, packageId, serial);
  return heldBytes(row.bytes, {
    sha256: row.sha256.toString("hex"),
    mediaType: "application/octet-stream",
    fileName: `${row.serial}-${pkg.version}.bin`,
  });
}

async function openImage(ctx: Ctx, packageId: string, serial: string) {
  const pkg = await getBuiltPackage(ctx, packageId);
  return { pkg, row: await getImage(ctx.db, pkg.id, serial), layout: await layoutOf(ctx, pkg) };
}

async function layoutOf(ctx: Ctx, pkg: PackageRow): Promise<CompiledLayout> {
  return compileLayout((await getLayoutById(ctx.db, pkg.layoutId)).document);
}

const derivationsOf = (ctx: Ctx, rows: readonly ImageRow[]) =>
  listDerivationsOfSets(
    ctx.db,
    rows.map((row) => row.coefficientSetId),
  );

function factsOf(row: ImageRow, derivations: ReadonlyMap<string, string>): ImageSummary {
  return {
    serial: row.serial,
    hardwareId: row.hardwareId,
    length: row.bytes.length,
    sha256: row.sha256.toString("hex"),
    hexSha256: row.hexSha256.toString("hex"),
    derivation: derivations.get(row.coefficientSetId) as string,
    coefficientSet: row.coefficientSetId,
  };
}

/** Fields and checksums of an image as read. */
export function fieldsOf(layout: CompiledLayout, bytes: Uint8Array): DecodedFieldView[] {
  return decodeImage(layout, bytes).map((field, i) => {
    return { ...field, length: field.raw.length / 2, source: layout.fields[i]?.source ?? null };
  });
}

function extentOf(layout: CompiledLayout, { kind, name, at, end }: Extent): ImageView["extents"][number] {
  const field = kind === "field" ? layout.fields.find((one) => one.name === name) : undefined;
  return { kind, name, at, length: end - at, source: field?.source ?? null };
}
