import { type CompiledChecksum, compileChecksum } from "@/builders/codec/compile-checksum";
import type { NumberType } from "@/builders/codec/field-types";
import { type BitPlace, type LayoutCell, listCells } from "@/builders/codec/layout-cells";
import { listStructureProblems } from "@/builders/codec/lint/lint-structure";
import { joinRanges } from "@/builders/codec/memory-map";
import { listSegments, listWrittenPieces, type MemoryPiece } from "@/builders/codec/segments";
import { type ImageSources, SOURCE_READERS } from "@/builders/codec/sources";
import { AppError } from "@/lib/errors";
import type { ByteRange, FieldType, LayoutDocument, SourceName } from "@/schemas/documents/layout";

export type { CompiledChecksum } from "@/builders/codec/compile-checksum";

/** One value as it is stored: a field, an element of an array (`name[0]`) or a part of an integer's bits (`name.part`). */
export interface CompiledField {
  name: string;
  at: number;
  /** Bytes; those of the whole integer for a part of its bits. */
  width: number;
  type: FieldType;
  /** Undefined for ascii and bytes. */
  number: NumberType | undefined;
  /** The bits that the value takes; null where it takes all. */
  bits: BitPlace | null;
  littleEndian: boolean;
  scale: number;
  bias: number;
  /** Limits of the value; infinite where the layout names none. */
  min: number;
  max: number;
  /** Of an enumeration; null for others. */
  names: EnumerationNames | null;
  unit: string | null;
  /** Null for constants. */
  source: SourceName | null;
  /** The value for a device: a constant or what its source says. */
  read: (sources: ImageSources) => number | string | null | undefined;
}

export interface EnumerationNames {
  stored: ReadonlyMap<string, number>;
  name: ReadonlyMap<number, string>;
}

/** A layout made ready to encode and decode many images: nothing is looked up per device. */
export interface CompiledLayout {
  document: LayoutDocument;
  bytes: number;
  fill: number;
  /** Address of the image's first byte. */
  baseAddress: number;
  /** Where the image lies in the device; one piece unless the layout names segments. */
  pieces: MemoryPiece[];
  /** The same without what is kept, by rising address: what a file for a station holds. */
  written: MemoryPiece[];
  /** Joined and in rising order. */
  kept: ByteRange[];
  fields: CompiledField[];
  checksums: CompiledChecksum[];
}

/**
 * Makes a layout ready to encode with.
 * @throws AppError `layout.invalid` {problems} where it could not be encoded without doubt.
 */
export function compileLayout(layout: LayoutDocument): CompiledLayout {
  const problems = listStructureProblems(layout);
  if (problems.length > 0) {
    throw new AppError("layout.invalid", {
      problems,
      message: `The layout cannot be encoded: ${problems[0]?.message}`,
    });
  }
  const { memory } = layout;
  const kept = joinRanges(layout.kept ?? [], memory.bytes);
  const pieces = listSegments(memory);
  return {
    document: layout,
    bytes: memory.bytes,
    fill: memory.fill,
    baseAddress: memory.baseAddress,
    pieces,
    written: listWrittenPieces(pieces, kept),
    kept,
    fields: layout.fields.flatMap((field, i) => {
      const littleEndian = (field.byteOrder ?? memory.byteOrder) === "little";
      return listCells(field, `/fields/${i}`).map((cell) => compileCell(cell, littleEndian));
    }),
    checksums: layout.checksums.map((checksum) => compileChecksum(checksum, layout)),
  };
}

function compileCell(cell: LayoutCell, littleEndian: boolean): CompiledField {
  const { name, at, width, type, number, bits, scale, bias, unit, value } = cell;
  const source = "from" in value ? value.from : null;
  const constant = "const" in value ? value.const : undefined;
  return {
    name,
    at,
    width,
    type,
    number,
    bits,
    littleEndian,
    scale,
    bias,
    min: cell.min ?? Number.NEGATIVE_INFINITY,
    max: cell.max ?? Number.POSITIVE_INFINITY,
    names: cell.names && namesOf(cell.names),
    unit,
    source,
    read: source === null ? () => constant : SOURCE_READERS[source],
  };
}

function namesOf(names: Record<string, number>): EnumerationNames {
  const entries = Object.entries(names);
  return { stored: new Map(entries), name: new Map(entries.map(([name, stored]) => [stored, name])) };
}
