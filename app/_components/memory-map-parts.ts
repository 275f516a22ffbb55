import { type MapPart, tintOfSource } from "@/app/_components/memory-map-rows";
import { findChecksumWidth, rangesOf } from "@/builders/codec/checksum-algorithm";
import { findFieldWidth } from "@/builders/codec/field-types";

import type { LayoutDocument } from "@/schemas/documents/layout";

export interface LayoutMemory {
  bytes: number;
  pageBytes: number;
  /** Bytes that a field or checksum covers. */
  used: number;
  parts: MapPart[];
}

/** What the memory map draws of a layout; parts whose width is not known are left out. */
export function memoryOfLayout(layout: LayoutDocument): LayoutMemory {
  const { bytes, pageBytes } = layout.memory;
  const fields = layout.fields.flatMap((field): MapPart[] => {
    const length = findFieldWidth(field);
    if (length === undefined || length <= 0) return [];
    const tint = tintOfSource("from" in field.value ? field.value.from : undefined);
    return [{ name: field.name, at: field.at, length, tint, isText: field.type === "ascii" }];
  });
  const checksums = layout.checksums.flatMap(({ name, at, algorithm, over }): MapPart[] => {
    const length = findChecksumWidth(algorithm);
    return length === undefined ? [] : [{ name, at, length, tint: "checksum", over: rangesOf(over) }];
  });
  const kept = (layout.kept ?? []).map(
    ([from, to]): MapPart => ({ name: "kept", at: from, length: to - from + 1, tint: "kept" }),
  );
  const used = [...fields, ...checksums].reduce((sum, part) => sum + part.length, 0);
  return { bytes, pageBytes, used, parts: [...fields, ...checksums, ...kept].filter((part) => part.length > 0) };
}
