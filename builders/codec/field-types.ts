import type { FieldType, LayoutField } from "@/schemas/documents/layout";

export interface NumberType {
  /** `wide` is an integer beyond binary64's exact ones: it is read and written as decimal text. */
  kind: "integer" | "float" | "wide";
  /** Bytes. */
  width: number;
  /** Smallest and largest stored number, inclusive; for `wide` the nearest binary64. */
  min: number;
  max: number;
}

/** Largest finite binary32: (2 − 2⁻²³)·2¹²⁷ (IEEE 754). */
export const BINARY32_MAX = (2 - 2 ** -23) * 2 ** 127;

/** Most bytes of packed decimal: 14 digits are exact in binary64, 16 are not. */
const BCD_BYTES_MAX = 7;

/** Sizes of fixed-point numbers, bits. */
const FIXED_BITS: readonly unknown[] = [8, 16, 24, 32];

type NamedNumber = Exclude<FieldType, "ascii" | "bytes" | "fixed" | "bcd">;

/** The numeric types that their name says everything of. */
export const NUMBER_TYPES: Readonly<Record<NamedNumber, NumberType>> = {
  u8: integerOf(8, false),
  i8: integerOf(8, true),
  u16: integerOf(16, false),
  i16: integerOf(16, true),
  u24: integerOf(24, false),
  i24: integerOf(24, true),
  u32: integerOf(32, false),
  i32: integerOf(32, true),
  u64: { ...integerOf(64, false), kind: "wide" },
  i64: { ...integerOf(64, true), kind: "wide" },
  f32: { kind: "float", width: 4, min: -BINARY32_MAX, max: BINARY32_MAX },
  f64: { kind: "float", width: 8, min: -Number.MAX_VALUE, max: Number.MAX_VALUE },
};

const OTHER_TYPES: readonly unknown[] = ["fixed", "bcd", "ascii", "bytes"];

/** An integer of that many bits, two's complement where signed; width in whole bytes. */
export function integerOf(bits: number, signed: boolean): NumberType {
  const width = Math.ceil(bits / 8);
  if (signed) return { kind: "integer", width, min: -(2 ** (bits - 1)), max: 2 ** (bits - 1) - 1 };
  return { kind: "integer", width, min: 0, max: 2 ** bits - 1 };
}

/** The numeric type of that name; undefined for unknown names and for types that need more than their name. */
export function findNumberType(type: string): NumberType | undefined {
  return Object.hasOwn(NUMBER_TYPES, type) ? NUMBER_TYPES[type as NamedNumber] : undefined;
}

/** True for the name of a type, whatever else it needs. */
export function isFieldType(type: unknown): type is FieldType {
  return typeof type === "string" && (findNumberType(type) !== undefined || OTHER_TYPES.includes(type));
}

/** True for the types that hold numbers, be their size told or not. */
export function isNumeric(type: FieldType): boolean {
  return type !== "ascii" && type !== "bytes";
}

/** The numeric type of one element of a field; undefined for texts, bytes and where the field does not say its size. */
export function findFieldNumber(
  field: Pick<LayoutField, "type" | "length" | "bits" | "signed">,
): NumberType | undefined {
  if (field.type === "fixed") {
    return FIXED_BITS.includes(field.bits) ? integerOf(field.bits as number, field.signed ?? false) : undefined;
  }
  if (field.type === "bcd") {
    const { length = 0 } = field;
    const known = Number.isInteger(length) && length >= 1 && length <= BCD_BYTES_MAX;
    return known ? { kind: "integer", width: length, min: 0, max: 10 ** (2 * length) - 1 } : undefined;
  }
  return findNumberType(field.type);
}

/** Bytes of one element of a field; undefined where the document does not say. */
export function findElementWidth(field: Omit<LayoutField, "name" | "at">): number | undefined {
  if (isNumeric(field.type)) return findFieldNumber(field)?.width;
  if (field.type === "ascii") return Number.isInteger(field.length) ? field.length : undefined;
  const constant =
    field.value !== null && typeof field.value === "object" && "const" in field.value ? field.value.const : "";
  return isHexPairs(constant) ? constant.length / 2 : undefined;
}

/**
 * Bytes that a field covers, all elements of an array; undefined where the document does not say (ascii without length,
 * fixed without its bits, bytes without a constant of whole hex pairs).
 */
export function findFieldWidth(field: Omit<LayoutField, "name" | "at">): number | undefined {
  const width = findElementWidth(field);
  return width === undefined ? undefined : width * (field.count ?? 1);
}

/** Value of one step of the stored integer. */
export function scaleOf(field: Pick<LayoutField, "type" | "scale" | "fraction">): number {
  return field.type === "fixed" ? 2 ** -(field.fraction ?? 0) : (field.scale ?? 1);
}

/** True for a text of one or more whole pairs of hex digits. */
export function isHexPairs(value: unknown): value is string {
  return typeof value === "string" && /^(?:[0-9A-Fa-f]{2})+$/.test(value);
}
