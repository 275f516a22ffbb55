import type { CompiledField } from "@/builders/codec/compile-layout";
import { roundHalfEven } from "@/builders/codec/round-half-even";
import { writeBcd, writeBits, writeInteger } from "@/builders/codec/stored-integer";
import { isWideText, wideEnds } from "@/builders/codec/wide-integer";
import { AppError } from "@/lib/errors";

/** Where a value is written and whose it is, for errors. */
export interface EncodeTarget {
  bytes: Uint8Array;
  view: DataView;
  serial: string;
}

/**
 * Writes one value. Integers, packed decimal and fixed point are stored as round-half-even((value − bias) / scale), in
 * binary64, one subtraction and then one division; f32 is the nearest binary32, ties to even. Limits are inclusive and
 * apply before rounding. Of an enumeration the name or the stored number is taken, of 64-bit integers decimal digits or
 * a number.
 * @throws AppError with {serial, field, value, limit}: `image.source_missing`, `image.not_finite`,
 * `image.limit_exceeded`, `image.value_out_of_range`, `image.value_not_numeric`, `image.value_not_text`,
 * `image.value_not_named`, `image.not_ascii`, `image.serial_too_long`, `image.text_too_long`. Nothing is clamped or wrapped.
 */
export function encodeField(field: CompiledField, value: unknown, target: EncodeTarget): void {
  if (value === null || value === undefined) {
    throw refusal("image.source_missing", field, value, null, target.serial, "has no value");
  }
  if (field.names) writeStored(field, storedOfName(field, field.names, value, target.serial), target.bytes);
  else if (field.number?.kind === "wide") encodeWide(field, value, target);
  else if (field.number) encodeNumber(field, value, target);
  else if (field.type === "ascii") encodeText(field, value, target);
  else encodeHexConstant(field, value, target);
}

function encodeNumber(field: CompiledField, value: unknown, target: EncodeTarget): void {
  if (typeof value !== "number") {
    throw refusal("image.value_not_numeric", field, value, null, target.serial, "is not a number");
  }
  if (!Number.isFinite(value)) {
    throw refusal("image.not_finite", field, String(value), null, target.serial, "is not a finite number");
  }
  assertWithinLimits(field, value, target.serial);
  if (field.type === "f64") target.view.setFloat64(field.at, value, field.littleEndian);
  else if (field.type === "f32") encodeSingle(field, value, target);
  else encodeInteger(field, value, target);
}

function assertWithinLimits(field: CompiledField, value: number | bigint, serial: string): void {
  if (value < field.min) {
    throw refusal("image.limit_exceeded", field, told(value), field.min, serial, `is below the limit ${field.min}`);
  }
  if (value > field.max) {
    throw refusal("image.limit_exceeded", field, told(value), field.max, serial, `is above the limit ${field.max}`);
  }
}

/** Errors travel as JSON, which has no bigint. */
const told = (value: number | bigint) => (typeof value === "bigint" ? String(value) : value);

function encodeSingle(field: CompiledField, value: number, target: EncodeTarget): void {
  const single = Math.fround(value);
  if (!Number.isFinite(single)) throw outOfRange(field, value, value < 0, target.serial);
  target.view.setFloat32(field.at, single, field.littleEndian);
}

function encodeInteger(field: CompiledField, value: number, target: EncodeTarget): void {
  const type = field.number as NonNullable<CompiledField["number"]>;
  const stored = roundHalfEven((value - field.bias) / field.scale);
  if (!(stored >= type.min && stored <= type.max)) {
    throw outOfRange(field, value, stored < type.min, target.serial);
  }
  writeStored(field, stored, target.bytes);
}

function writeStored(field: CompiledField, stored: number, bytes: Uint8Array): void {
  if (field.bits) writeBits(bytes, field, field.bits, stored);
  else if (field.type === "bcd") writeBcd(bytes, field, stored);
  else writeInteger(bytes, field.at, field.width, field.littleEndian, stored);
}

function storedOfName(
  field: CompiledField,
  names: NonNullable<CompiledField["names"]>,
  value: unknown,
  serial: string,
): number {
  const stored = typeof value === "string" ? names.stored.get(value) : (value as number);
  if (stored !== undefined && names.name.has(stored)) return stored;
  const known = [...names.stored.keys()].join(", ");
  throw refusal("image.value_not_named", field, value, null, serial, `is none of ${known}`);
}

function encodeWide(field: CompiledField, value: unknown, target: EncodeTarget): void {
  const { serial, view } = target;
  if (typeof value === "number" && !Number.isFinite(value)) {
    throw refusal("image.not_finite", field, String(value), null, serial, "is not a finite number");
  }
  if (typeof value !== "number" && !isWideText(value)) {
    throw refusal("image.value_not_numeric", field, value, null, serial, "is not a whole number in decimal digits");
  }
  const stored = BigInt(typeof value === "number" ? roundHalfEven(value) : value);
  assertWithinLimits(field, typeof value === "number" ? value : stored, serial);
  const { min, max } = wideEnds(field.type);
  if (stored < min || stored > max) {
    const limit = String(stored < min ? min : max);
    const reason = `does not fit into ${field.type}; the ${stored < min ? "least" : "most"} is ${limit}`;
    throw refusal("image.value_out_of_range", field, value, limit, serial, reason);
  }
  view.setBigInt64(field.at, BigInt.asIntN(64, stored), field.littleEndian);
}

function encodeText(field: CompiledField, value: unknown, target: EncodeTarget): void {
  if (typeof value !== "string") {
    throw refusal("image.value_not_text", field, value, null, target.serial, "is not a text");
  }
  if (value.length > field.width) {
    const code = field.source === "device.serial" ? "image.serial_too_long" : "image.text_too_long";
    throw refusal(code, field, value, field.width, target.serial, `is longer than ${field.width} characters`);
  }
  const { bytes } = target;
  for (let i = 0; i < field.width; i++) {
    const char = i < value.length ? value.charCodeAt(i) : 0;
    // NUL pads the text, so it can't be part of it.
    if (i < value.length && (char < 0x20 || char > 0x7e)) {
      throw refusal("image.not_ascii", field, value, null, target.serial, "has characters outside printable ASCII");
    }
    bytes[field.at + i] = char;
  }
}

function encodeHexConstant(field: CompiledField, value: unknown, target: EncodeTarget): void {
  if (typeof value !== "string" || value.length !== 2 * field.width) {
    throw refusal("image.value_not_text", field, value, null, target.serial, "is not a constant of hex digits");
  }
  for (let i = 0; i < field.width; i++) {
    target.bytes[field.at + i] = Number.parseInt(value.slice(2 * i, 2 * i + 2), 16);
  }
}

/** Digits of a limit in the message; the error's `limit` has all of them. */
const TOLD_DIGITS = 12;

function outOfRange(field: CompiledField, value: number, below: boolean, serial: string): AppError {
  const type = field.number as NonNullable<CompiledField["number"]>;
  const stored = below ? type.min : type.max;
  const limit = type.kind === "integer" ? stored * field.scale + field.bias : stored;
  const size = field.bits ? `${field.bits.width} bits` : field.type;
  const end = `the ${below ? "least" : "most"} is ${Number(limit.toPrecision(TOLD_DIGITS))}`;
  return refusal("image.value_out_of_range", field, value, limit, serial, `does not fit into ${size}; ${end}`);
}

function refusal(
  code: string,
  field: CompiledField,
  value: unknown,
  limit: number | string | null,
  serial: string,
  reason: string,
): AppError {
  const shown = value === undefined ? null : value;
  const message = `${serial}: ${field.name}${shown === null ? "" : ` = ${shown}`} ${reason}`;
  return new AppError(code, { serial, field: field.name, value: shown, limit, message });
}
