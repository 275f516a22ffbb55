import type { CompiledField } from "@/builders/codec/compile-layout";
import { toHex } from "@/builders/codec/hex-text";

/**
 * The value that the stored bytes stand for: raw · scale + bias for integers, the number itself for f32 and f64, text
 * without its NUL padding for ascii, lower-case hex for bytes.
 * @returns null where the bytes hold no value: a NaN or infinity, or text that is not printable ASCII padded with NUL.
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
    default:
      return readStored(field, bytes) * field.scale + field.bias;
  }
}

/** The stored integer of an integer field, before scale and bias. */
export function readStored(field: CompiledField, bytes: Uint8Array): number {
  const value = readUnsigned(bytes, field.at, field.width, field.littleEndian);
  const { number } = field;
  return number && number.min < 0 && value > number.max ? value - 2 ** (8 * field.width) : value;
}

/** An unsigned integer of up to 32 bits. */
export function readUnsigned(bytes: Uint8Array, at: number, width: number, littleEndian: boolean): number {
  let value = 0;
  for (let i = 0; i < width; i++) {
    value = value * 256 + (bytes[littleEndian ? at + width - 1 - i : at + i] as number);
  }
  return value;
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
