import { type MapPart, tintOfSource } from "@/app/_components/memory-map-rows";
import { rangesOf } from "@/builders/codec/checksum-algorithm";
import { type LayoutPaths, listExtents } from "@/builders/codec/memory-map";
import type { LayoutDocument } from "@/schemas/documents/layout";

export interface LayoutMemory {
  bytes: number;
  pageBytes: number;
  /** Bytes that a field or checksum covers. */
  used: number;
  parts: MapPart[];
}

/**
 * What the memory map draws of a layout; parts whose width is not known are left out.
 * @param paths JSON pointers of the parts, where not all of the document can be read.
 */
export function memoryOfLayout(layout: LayoutDocument, paths?: LayoutPaths): LayoutMemory {
  const { bytes, pageBytes } = layout.memory;
  const tints = new Map<string, Pick<MapPart, "tint" | "isText" | "over">>();
  layout.fields.forEach((field, i) => {
    const tint = tintOfSource("from" in field.value ? field.value.from : undefined);
    tints.set(paths?.fields[i] ?? `/fields/${i}`, { tint, isText: field.type === "ascii" });
  });
  layout.checksums.forEach(({ over }, i) => {
    tints.set(paths?.checksums[i] ?? `/checksums/${i}`, { tint: "checksum", over: rangesOf(over) });
  });
  const parts = listExtents(layout, paths).map(
    ({ kind, name, at, end, path }): MapPart => ({
      name: kind === "field" || kind === "checksum" ? name : kind,
      at,
      length: end - at,
      tint: "kept",
      path,
      ...tints.get(path),
    }),
  );
  const used = parts.filter(({ tint }) => tint !== "kept").reduce((sum, part) => sum + part.length, 0);
  return { bytes, pageBytes, used, parts };
}
