import type { CompiledField } from "@/builders/codec/compile-layout";
import { toHex } from "@/builders/codec/files/hex-text";
import { readBcd, readBits, readUnsigned } from "@/builders/codec/stored-integer";

/**
 * The value that the stored bytes stand for: raw · scale + bias for integers, packed decimal and fixed point, the name for
 * an enumeration, decimal digits for 64-bit integers, the number itself for f32 and f64, text without its NUL padding
 * for ascii, lower-case hex for bytes.
 * @returns null where the bytes hold no value: a NaN or infinity, half bytes that are no digits, a number without a name, or
 * text that is not printable ASCII padded with NUL.
 */
export function decodeField(field: CompiledField, bytes: Uint8Array, view: DataView): number | string | null {
  switch (field.type) {
    case "ascii":
      return decodeText(bytes, field.at, field.width);
    case "bytes":
      return toHex(bytes, field.at, field.at + field.width);
    case "f32":
      return finiteOrNull(view.getFloat32(field.at, field.littleEndian));
    case "f64":
      return finiteOrNull(view.getFloat64(field.at, field.littleEndian));
    case "u64":
      return String(view.getBigUint64(field.at, field.littleEndian));
    case "i64":
      return String(view.getBigInt64(field.at, field.littleEndian));
    default:
      return decodeInteger(field, bytes);
  }
}

function decodeInteger(field: CompiledField, bytes: Uint8Array): number | string | null {
  const stored = readStored(field, bytes);
  if (stored === null) return null;
  if (field.names) return field.names.name.get(stored) ?? null;
  return stored * field.scale + field.bias;
}

/** The stored integer of a field of up to 32 bits, before scale and bias; null where packed decimal holds no digits. */
export function readStored(field: CompiledField, bytes: Uint8Array): number | null {
  if (field.type === "bcd") return readBcd(bytes, field) ?? null;
  const { number, bits } = field;
  const value = bits ? readBits(bytes, field, bits) : readUnsigned(bytes, field.at, field.width, field.littleEndian);
  if (!number || number.min >= 0 || value <= number.max) return value;
  return value - 2 ** (bits ? bits.width : 8 * field.width);
}

function finiteOrNull(value: number): number | null {
  return Number.isFinite(value) ? value : null;
}

function decodeText(bytes: Uint8Array, at: number, width: number): string | null {
  let text = "";
  let ended = false;
  for (let i = at; i < at + width; i++) {
    const char = bytes[i] as number;
    if (char === 0) {
      ended = true;
      continue;
    }
    if (ended || char < 0x20 || char > 0x7e) return null;
    text += String.fromCharCode(char);
  }
  return text;
}
