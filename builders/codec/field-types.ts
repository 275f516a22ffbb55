import type { FieldType, LayoutField } from "@/schemas/documents/layout";

export interface NumberType {
  kind: "integer" | "float";
  /** Bytes. */
  width: number;
  /** Smallest and largest stored number, inclusive. */
  min: number;
  max: number;
}

/** Largest finite binary32: (2 − 2⁻²³)·2¹²⁷ (IEEE 754). */
const BINARY32_MAX = (2 - 2 ** -23) * 2 ** 127;

const unsigned = (width: number): NumberType => ({ kind: "integer", width, min: 0, max: 2 ** (8 * width) - 1 });
const signed = (width: number): NumberType => ({
  kind: "integer",
  width,
  min: -(2 ** (8 * width - 1)),
  max: 2 ** (8 * width - 1) - 1,
});

/** The numeric types; `ascii` and `bytes` have no number. */
export const NUMBER_TYPES: Readonly<Record<Exclude<FieldType, "ascii" | "bytes">, NumberType>> = {
  u8: unsigned(1),
  i8: signed(1),
  u16: unsigned(2),
  i16: signed(2),
  u24: unsigned(3),
  i24: signed(3),
  u32: unsigned(4),
  i32: signed(4),
  f32: { kind: "float", width: 4, min: -BINARY32_MAX, max: BINARY32_MAX },
  f64: { kind: "float", width: 8, min: -Number.MAX_VALUE, max: Number.MAX_VALUE },
};

/** The numeric type of that name; undefined for `ascii`, `bytes` and unknown names. */
export function findNumberType(type: string): NumberType | undefined {
  return Object.hasOwn(NUMBER_TYPES, type) ? NUMBER_TYPES[type as keyof typeof NUMBER_TYPES] : undefined;
}

/**
 * Bytes that a field covers; undefined where the document does not say (ascii without length, bytes without a
 * constant of whole hex pairs).
 */
export function findFieldWidth(field: Pick<LayoutField, "type" | "length" | "value">): number | undefined {
  const number = findNumberType(field.type);
  if (number) return number.width;
  if (field.type === "ascii") return Number.isInteger(field.length) ? field.length : undefined;
  const constant =
    field.value !== null && typeof field.value === "object" && "const" in field.value ? field.value.const : "";
  return isHexPairs(constant) ? constant.length / 2 : undefined;
}

/** True for a text of one or more whole pairs of hex digits. */
export function isHexPairs(value: unknown): value is string {
  return typeof value === "string" && /^(?:[0-9A-Fa-f]{2})+$/.test(value);
}
