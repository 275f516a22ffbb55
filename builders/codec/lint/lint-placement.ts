import { rangesOf } from "@/builders/codec/checksum-algorithm";
import { findFieldNumber } from "@/builders/codec/field-types";
import { joinRanges, type LayoutPaths, listExtents } from "@/builders/codec/memory-map";
import { addressAt, listSegments } from "@/builders/codec/segments";
import type { Problem } from "@/lib/errors";
import type { LayoutDocument } from "@/schemas/documents/layout";

/**
 * Warnings about where things lie: numbers that two write cycles are needed for, numbers at odd addresses, and fields
 * that no checksum watches over. That pages and alignment matter is common practice, no source.
 */
export function lintPlacement(layout: LayoutDocument, paths: LayoutPaths): Problem[] {
  return [...lintPages(layout, paths), ...lintAlignment(layout, paths), ...lintCoverage(layout, paths)];
}

/** Pages are counted from address 0 of the device, so the base address shifts them. */
function lintPages(layout: LayoutDocument, paths: LayoutPaths): Problem[] {
  const { pageBytes } = layout.memory;
  const pieces = listSegments(layout.memory);
  const texts = new Set(layout.fields.flatMap((f, i) => (findFieldNumber(f) ? [] : [paths.fields[i]])));
  return listExtents(layout, paths).flatMap(({ kind, name, at, end, path }) => {
    // One byte a page means the memory has none; a text torn by a power loss is told by its checksum.
    if (kind === "kept" || kind === "reserved" || pageBytes === 1 || end - at > pageBytes || texts.has(path)) return [];
    const address = addressAt(pieces, at);
    if (Math.floor(address / pageBytes) === Math.floor((address + end - 1 - at) / pageBytes)) return [];
    return [
      { path: `${path}/at`, code: `${kind}.page_crossing`, message: `“${name}” crosses a page of ${pageBytes} bytes` },
    ];
  });
}

/** Multiples that a number of some bytes starts at so that a 16-bit or 32-bit core reads it in whole words. */
export const alignmentOf = (width: number): number => (width === 3 ? 2 : width);

function lintAlignment(layout: LayoutDocument, paths: LayoutPaths): Problem[] {
  const pieces = listSegments(layout.memory);
  return layout.fields.flatMap((field, i) => {
    // Firmware takes packed decimal digit by digit.
    const width = field.type === "bcd" ? 1 : (findFieldNumber(field)?.width ?? 1);
    const address = addressAt(pieces, field.at);
    if (address % alignmentOf(width) === 0) return [];
    const message =
      width === 2 || width === 3
        ? `“${field.name}” starts at an odd address, ${addressText(address)}; fine for firmware that reads bytes`
        : `“${field.name}” is ${width} bytes wide and not at a multiple of ${width}`;
    return [{ path: `${paths.fields[i]}/at`, code: "field.unaligned", message }];
  });
}

const addressText = (address: number) => `0x${address.toString(16).toUpperCase().padStart(4, "0")}`;

function lintCoverage(layout: LayoutDocument, paths: LayoutPaths): Problem[] {
  if (layout.checksums.length === 0) {
    return [{ path: "/checksums", code: "layout.checksum_missing", message: "No checksum tells a damaged image" }];
  }
  const extents = listExtents(layout, paths).filter((part) => part.kind === "field");
  const covered = layout.checksums.map(({ over }) => joinRanges(rangesOf(over), layout.memory.bytes));
  return extents.flatMap(({ name, at, end, path }) => {
    if (covered.some((ranges) => ranges.some(([from, to]) => from <= at && to >= end - 1))) return [];
    return [{ path, code: "field.not_covered", message: `No checksum covers all of “${name}”` }];
  });
}
