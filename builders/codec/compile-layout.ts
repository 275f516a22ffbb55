import { type Crc, getCrc } from "@/builders/codec/crc";
import { findFieldWidth, findNumberType, type NumberType } from "@/builders/codec/field-types";
import { listStructureProblems } from "@/builders/codec/lint-structure";
import { findChecksumWidth, joinRanges } from "@/builders/codec/memory-map";
import { type ImageSources, SOURCE_READERS } from "@/builders/codec/sources";
import { AppError } from "@/lib/errors";
import type {
  ByteRange,
  FieldType,
  LayoutChecksum,
  LayoutDocument,
  LayoutField,
  SourceName,
} from "@/schemas/documents/layout";

export interface CompiledField {
  name: string;
  at: number;
  /** Bytes. */
  width: number;
  type: FieldType;
  /** Undefined for ascii and bytes. */
  number: NumberType | undefined;
  littleEndian: boolean;
  scale: number;
  bias: number;
  /** Limits of the value; infinite where the layout names none. */
  min: number;
  max: number;
  unit: string | null;
  /** Null for constants. */
  source: SourceName | null;
  /** The value for a device: a constant or what its source says. */
  read: (sources: ImageSources) => number | string | null | undefined;
}

export interface CompiledChecksum {
  name: string;
  at: number;
  width: number;
  littleEndian: boolean;
  /** First offset covered and the offset after the last. */
  from: number;
  end: number;
  algorithm: string;
  crc: Crc;
}

/** A layout made ready to encode and decode many images: nothing is looked up per device. */
export interface CompiledLayout {
  document: LayoutDocument;
  bytes: number;
  fill: number;
  baseAddress: number;
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
  return {
    document: layout,
    bytes: memory.bytes,
    fill: memory.fill,
    baseAddress: memory.baseAddress,
    kept: joinRanges(layout.kept ?? [], memory.bytes),
    fields: layout.fields.map((field) => compileField(field, layout)),
    checksums: layout.checksums.map((checksum) => compileChecksum(checksum, layout)),
  };
}

function compileField(field: LayoutField, layout: LayoutDocument): CompiledField {
  const source = "from" in field.value ? field.value.from : null;
  const constant = "const" in field.value ? field.value.const : undefined;
  return {
    name: field.name,
    at: field.at,
    width: findFieldWidth(field) as number,
    type: field.type,
    number: findNumberType(field.type),
    littleEndian: (field.byteOrder ?? layout.memory.byteOrder) === "little",
    scale: field.scale ?? 1,
    bias: field.bias ?? 0,
    min: field.min ?? Number.NEGATIVE_INFINITY,
    max: field.max ?? Number.POSITIVE_INFINITY,
    unit: field.unit ?? null,
    source,
    read: source === null ? () => constant : SOURCE_READERS[source],
  };
}

function compileChecksum(checksum: LayoutChecksum, layout: LayoutDocument): CompiledChecksum {
  return {
    name: checksum.name,
    at: checksum.at,
    width: findChecksumWidth(checksum.algorithm) as number,
    littleEndian: (checksum.byteOrder ?? layout.memory.byteOrder) === "little",
    from: checksum.over[0],
    end: checksum.over[1] + 1,
    algorithm: checksum.algorithm,
    crc: getCrc(checksum.algorithm),
  };
}
