import type { BitPlace } from "@/builders/codec/layout-cells";

/** Where an integer lies: its first byte, its bytes and their order. */
export interface IntegerPlace {
  at: number;
  /** Bytes, 1 to 4 (packed decimal: to 7). */
  width: number;
  littleEndian: boolean;
}

/** Writes an integer of up to 32 bits in two's complement. */
export function writeInteger(bytes: Uint8Array, at: number, width: number, littleEndian: boolean, value: number): void {
  if (littleEndian) {
    for (let i = 0; i < width; i++) bytes[at + i] = value >> (8 * i);
  } else {
    for (let i = 0; i < width; i++) bytes[at + i] = value >> (8 * (width - 1 - i));
  }
}

/** An unsigned integer of up to 32 bits. */
export function readUnsigned(bytes: Uint8Array, at: number, width: number, littleEndian: boolean): number {
  let value = 0;
  for (let i = 0; i < width; i++) {
    value = value * 256 + (bytes[littleEndian ? at + width - 1 - i : at + i] as number);
  }
  return value;
}

/** Puts an integer, two's complement where below 0, into some bits of another; the others stay as they are. */
export function writeBits(bytes: Uint8Array, place: IntegerPlace, bits: BitPlace, value: number): void {
  const { at, width, littleEndian } = place;
  const mask = (bits.width === 32 ? -1 : 2 ** bits.width - 1) << bits.from;
  const whole = readUnsigned(bytes, at, width, littleEndian);
  writeInteger(bytes, at, width, littleEndian, (whole & ~mask) | ((value << bits.from) & mask));
}

/** Some bits of an integer as an unsigned number. */
export function readBits(bytes: Uint8Array, place: IntegerPlace, bits: BitPlace): number {
  const whole = readUnsigned(bytes, place.at, place.width, place.littleEndian);
  return Math.floor(whole / 2 ** bits.from) % 2 ** bits.width;
}

/** Writes packed decimal, two digits a byte; the most significant ones first where big-endian. */
export function writeBcd(bytes: Uint8Array, { at, width, littleEndian }: IntegerPlace, value: number): void {
  let rest = value;
  for (let i = 0; i < width; i++) {
    const pair = rest % 100;
    bytes[littleEndian ? at + i : at + width - 1 - i] = Math.floor(pair / 10) * 16 + (pair % 10);
    rest = Math.floor(rest / 100);
  }
}

/** @returns undefined where a half byte is no digit. */
export function readBcd(bytes: Uint8Array, { at, width, littleEndian }: IntegerPlace): number | undefined {
  let value = 0;
  for (let i = 0; i < width; i++) {
    const byte = bytes[littleEndian ? at + width - 1 - i : at + i] as number;
    if (byte >> 4 > 9 || (byte & 15) > 9) return undefined;
    value = value * 100 + (byte >> 4) * 10 + (byte & 15);
  }
  return value;
}
