import { findNumberType } from "@/builders/codec/field-types";
import { listExtents } from "@/builders/codec/memory-map";
import type { Problem } from "@/lib/errors";
import type { LayoutDocument } from "@/schemas/documents/layout";

type Paths = { fields: string[]; checksums: string[]; kept: string[] };

/**
 * Warnings about where things lie: numbers that two write cycles are needed for, numbers at odd addresses, and fields
 * that no checksum watches over. That pages and alignment matter is common practice, no source.
 */
export function lintPlacement(layout: LayoutDocument, paths: Paths): Problem[] {
  return [...lintPages(layout, paths), ...lintAlignment(layout, paths), ...lintCoverage(layout, paths)];
}

/** Pages are counted from address 0 of the device, so the base address shifts them. */
function lintPages(layout: LayoutDocument, paths: Paths): Problem[] {
  const { pageBytes, baseAddress } = layout.memory;
  const texts = new Set(layout.fields.flatMap((f, i) => (findNumberType(f.type) ? [] : [paths.fields[i]])));
  return listExtents(layout, paths).flatMap(({ kind, name, at, end, path }) => {
    // One byte a page means the memory has none; a text torn by a power loss is told by its checksum.
    if (kind === "kept" || pageBytes === 1 || end - at > pageBytes || texts.has(path)) return [];
    const first = Math.floor((baseAddress + at) / pageBytes);
    if (first === Math.floor((baseAddress + end - 1) / pageBytes)) return [];
    return [
      { path: `${path}/at`, code: `${kind}.page_crossing`, message: `“${name}” crosses a page of ${pageBytes} bytes` },
    ];
  });
}

/** Multiples that a number of some bytes starts at so that a 16-bit or 32-bit core reads it in whole words. */
export const alignmentOf = (width: number): number => (width === 3 ? 2 : width);

function lintAlignment(layout: LayoutDocument, paths: Paths): Problem[] {
  return layout.fields.flatMap((field, i) => {
    const width = findNumberType(field.type)?.width ?? 1;
    const address = layout.memory.baseAddress + field.at;
    if (address % alignmentOf(width) === 0) return [];
    const message =
      width === 2 || width === 3
        ? `“${field.name}” starts at an odd address, ${addressText(address)}; fine for firmware that reads bytes`
        : `“${field.name}” is ${width} bytes wide and not at a multiple of ${width}`;
    return [{ path: `${paths.fields[i]}/at`, code: "field.unaligned", message }];
  });
}

const addressText = (address: number) => (address < 65536 ? `${address}` : `0x${address.toString(16).toUpperCase()}`);

function lintCoverage(layout: LayoutDocument, paths: Paths): Problem[] {
  if (layout.checksums.length === 0) {
    return [{ path: "/checksums", code: "layout.checksum_missing", message: "No checksum tells a damaged image" }];
  }
  const extents = listExtents(layout, paths).filter((part) => part.kind === "field");
  return extents.flatMap(({ name, at, end, path }) => {
    if (layout.checksums.some(({ over: [from, to] }) => from <= at && to >= end - 1)) return [];
    return [{ path, code: "field.not_covered", message: `No checksum covers all of “${name}”` }];
  });
}
