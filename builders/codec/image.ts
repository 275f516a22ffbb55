import { type CompiledChecksum, findStoredSum } from "@/builders/codec/compile-checksum";
import type { CompiledLayout } from "@/builders/codec/compile-layout";
import { decodeField } from "@/builders/codec/decode-field";
import { encodeField } from "@/builders/codec/encode-field";
import { toHex } from "@/builders/codec/files/hex-text";
import type { ImageSources } from "@/builders/codec/sources";
import { readUnsigned, writeInteger } from "@/builders/codec/stored-integer";
import { AppError } from "@/lib/errors";

/** One field, element, part of bits or checksum of an image as read. Members stand in the order of RFC 8785, so that writing them is canonical. */
export interface DecodedField {
  at: number;
  name: string;
  /** Lower-case hex of the stored bytes. */
  raw: string;
  unit: string | null;
  /** Null where the bytes hold no value (NaN, unprintable text, a number without a name). */
  value: number | string | null;
}

export interface ChecksumResult {
  name: string;
  ok: boolean;
  /** Computed over the covered bytes, as an unsigned number; what is stored instead where that is forbidden. */
  expected: number;
  /** As stored, as an unsigned number. */
  stored: number;
}

/**
 * The bytes of one device's EEPROM: fill everywhere, then the fields, then the checksums in the order listed.
 * @throws AppError as {@link encodeField} and `image.checksum_forbidden`, with {serial, field, value, limit}.
 */
export function encodeImage(layout: CompiledLayout, sources: ImageSources): Uint8Array<ArrayBuffer> {
  const bytes = new Uint8Array(layout.bytes);
  encodeImageInto(bytes, layout, sources);
  return bytes;
}

/**
 * As {@link encodeImage}, into memory of the layout's length: many images share one piece, which costs less than one each.
 * What is in it after an error is no image.
 */
export function encodeImageInto(bytes: Uint8Array, layout: CompiledLayout, sources: ImageSources): void {
  assertLength(layout, bytes);
  bytes.fill(layout.fill);
  const view = new DataView(bytes.buffer, bytes.byteOffset, bytes.byteLength);
  const target = { bytes, view, serial: sources.device.serial };
  for (const field of layout.fields) encodeField(field, field.read(sources), target);
  for (const sum of layout.checksums) {
    writeInteger(bytes, sum.at, sum.width, sum.littleEndian, storedSum(sum, bytes, target.serial));
  }
}

function storedSum(sum: CompiledChecksum, bytes: Uint8Array, serial: string): number {
  const computed = sum.compute(bytes);
  const stored = findStoredSum(sum, computed);
  if (stored !== undefined) return stored;
  const value = computed
    .toString(16)
    .toUpperCase()
    .padStart(2 * sum.width, "0");
  const message = `${serial}: ${sum.name} would be ${value}, which the layout forbids; name a value “instead”, or change what it covers`;
  throw new AppError("image.checksum_forbidden", { serial, field: sum.name, value, limit: null, message });
}

/**
 * Every field and checksum of an image: fields in the layout's order, then checksums (value: unsigned number, no unit).
 * @throws AppError `image.wrong_length` {expected, actual}
 */
export function decodeImage(layout: CompiledLayout, bytes: Uint8Array): DecodedField[] {
  assertLength(layout, bytes);
  const view = new DataView(bytes.buffer, bytes.byteOffset, bytes.byteLength);
  const decoded: DecodedField[] = [];
  for (const field of layout.fields) {
    decoded.push({
      at: field.at,
      name: field.name,
      raw: toHex(bytes, field.at, field.at + field.width),
      unit: field.unit,
      value: decodeField(field, bytes, view),
    });
  }
  for (const sum of layout.checksums) {
    decoded.push({
      at: sum.at,
      name: sum.name,
      raw: toHex(bytes, sum.at, sum.at + sum.width),
      unit: null,
      value: readUnsigned(bytes, sum.at, sum.width, sum.littleEndian),
    });
  }
  return decoded;
}

/**
 * Compares every stored checksum with the one computed over the stored bytes.
 * @throws AppError `image.wrong_length` {expected, actual}
 */
export function checkChecksums(layout: CompiledLayout, bytes: Uint8Array): ChecksumResult[] {
  assertLength(layout, bytes);
  return layout.checksums.map((sum) => {
    const computed = sum.compute(bytes);
    const allowed = findStoredSum(sum, computed);
    const stored = readUnsigned(bytes, sum.at, sum.width, sum.littleEndian);
    return { name: sum.name, ok: allowed === stored, expected: allowed ?? computed, stored };
  });
}

/**
 * The bytes that digests, readback and dump comparison are about: kept ranges taken as fill (contract, section 4).
 * @returns a copy, or the same array where nothing is kept.
 * @throws AppError `image.wrong_length` {expected, actual}
 */
export function imageDigestBytes(layout: CompiledLayout, bytes: Uint8Array): Uint8Array {
  assertLength(layout, bytes);
  if (layout.kept.length === 0) return bytes;
  // Not slice(), which of a Buffer is no copy.
  const copy = new Uint8Array(bytes);
  for (const [from, to] of layout.kept) copy.fill(layout.fill, from, to + 1);
  return copy;
}

function assertLength(layout: CompiledLayout, bytes: Uint8Array): void {
  if (bytes.length === layout.bytes) return;
  const message = `The image has ${bytes.length} bytes, the layout ${layout.bytes}`;
  throw new AppError("image.wrong_length", { expected: layout.bytes, actual: bytes.length, message });
}
