import { findElementWidth, findFieldNumber, integerOf, type NumberType, scaleOf } from "@/builders/codec/field-types";
import type { BitField, Constant, Enumeration, FieldType, LayoutField, SourceName } from "@/schemas/documents/layout";

/** Which bits of an integer a value takes; `from` is its lowest one, 0 the least significant of the integer. */
export interface BitPlace {
  from: number;
  width: number;
}

/** One value as it is stored: a field, an element of an array (`name[0]`), or a part of an integer's bits (`name.part`). */
export interface LayoutCell {
  name: string;
  at: number;
  /** Bytes read and written; those of the whole integer for a part of its bits. */
  width: number;
  type: FieldType;
  /** Undefined for ascii and bytes. */
  number: NumberType | undefined;
  bits: BitPlace | null;
  scale: number;
  bias: number;
  unit: string | null;
  /** Undefined where the layout names none. */
  min: number | undefined;
  max: number | undefined;
  names: Enumeration | null;
  value: { from: SourceName } | { const: Constant };
  /** JSON pointer of what declares it. */
  path: string;
}

/**
 * The values of a field one by one; a field that is no array and has no bits is one. None where the document does not say
 * how wide it is. Elements beyond a list of constants have the last one; the lint tells that.
 */
export function listCells(field: LayoutField, path: string): LayoutCell[] {
  const width = findElementWidth(field);
  if (width === undefined) return [];
  if ("bits" in field.value) {
    return field.value.bits.map((part, i) => cellOfBits(field, part, width, `${path}/value/bits/${i}`));
  }
  if (field.count === undefined) return [cellOf(field, field.name, field.at, width, 0, path)];
  return Array.from({ length: field.count }, (_, i) =>
    cellOf(field, `${field.name}[${i}]`, field.at + i * width, width, i, path),
  );
}

function cellOf(field: LayoutField, name: string, at: number, width: number, index: number, path: string): LayoutCell {
  return {
    name,
    at,
    width,
    type: field.type,
    number: findFieldNumber(field),
    bits: null,
    scale: scaleOf(field),
    bias: field.bias ?? 0,
    unit: field.unit ?? null,
    min: field.min,
    max: field.max,
    names: field.enum ?? null,
    value: elementValue(field, index),
    path,
  };
}

function elementValue(field: LayoutField, index: number): LayoutCell["value"] {
  if ("from" in field.value) return field.value;
  const constant = "const" in field.value ? field.value.const : [];
  return { const: Array.isArray(constant) ? (constant[Math.min(index, constant.length - 1)] ?? 0) : constant };
}

function cellOfBits(field: LayoutField, part: BitField, width: number, path: string): LayoutCell {
  return {
    name: `${field.name}.${part.name}`,
    at: field.at,
    width,
    type: field.type,
    number: { ...integerOf(part.width, part.signed ?? false), width },
    bits: { from: part.from, width: part.width },
    scale: part.scale ?? 1,
    bias: part.bias ?? 0,
    unit: part.unit ?? null,
    min: part.min,
    max: part.max,
    names: part.enum ?? null,
    value: part.value,
    path,
  };
}
