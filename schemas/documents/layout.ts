/** The layout document: which bytes of the EEPROM hold what (contract, section 4). Its shape is judged in `layout-shape.ts`. */
import type { Problem } from "@/lib/errors";
import { shapeProblems } from "@/schemas/documents/layout-shape";

export type ByteOrder = "little" | "big";

/**
 * Types a field can have: `ascii` and `bcd` take a `length`, `fixed` takes `bits`, `fraction` and `signed`, `bytes` takes its
 * width from its constant; `u64` and `i64` are read and written as decimal text.
 */
export type FieldType = `${"u" | "i"}${8 | 16 | 24 | 32 | 64}` | "f32" | "f64" | "fixed" | "bcd" | "ascii" | "bytes";

/** Where a field's value may come from when the image of a device is encoded. */
export type SourceName =
  | "device.serial"
  | "lot.code"
  | `layout.${"major" | "minor" | "patch"}`
  | `package.${"major" | "minor" | "patch"}`
  | `coefficients.${CoefficientName}`
  | `family.${"referenceTemperature" | "capacity" | "nominalOutput"}`;

export type CoefficientName =
  | "tempOffset"
  | "tempSlope"
  | "zero"
  | "zeroTc"
  | "zeroTc2"
  | "gain"
  | "gainTc"
  | "gainTc2";

/** A number, a text (ascii), a name (of an enumeration), decimal digits (64 bits) or an even count of hex digits (bytes). */
export type Constant = number | string;

/** A list has one constant an element of an array. */
export type FieldValue = { from: SourceName } | { const: Constant | Constant[] } | { bits: BitField[] };

/** A part of an unsigned integer's bits. Bits that no part names stay as in the fill. */
export interface BitField {
  name: string;
  /** Its lowest bit; 0 is the least significant one of the integer. */
  from: number;
  /** Number of bits. */
  width: number;
  /** Two's complement of that many bits; false where absent. */
  signed?: boolean;
  scale?: number;
  bias?: number;
  unit?: string;
  min?: number;
  max?: number;
  enum?: Enumeration;
  description?: string;
  value: { from: SourceName } | { const: Constant };
}

/** Stored integer by name. */
export type Enumeration = Record<string, number>;

/** Inclusive offsets into the image. */
export type ByteRange = [from: number, to: number];

export interface LayoutMemory {
  bytes: number;
  pageBytes: number;
  /** Address of image byte 0 in the device, 0…4294967295. */
  baseAddress: number;
  /** Value of every byte that no field or checksum covers, 0…255. */
  fill: number;
  byteOrder: ByteOrder;
  /** Where the memory is not in one piece: from offset `at` on, up to the next one, bytes lie at another address. */
  segments?: MemorySegment[];
}

export interface MemorySegment {
  name?: string;
  /** Offset in the image of the first byte that lies here, above 0. */
  at: number;
  /** Address of that byte in the device, 0…4294967295. */
  baseAddress: number;
}

export interface LayoutField {
  name: string;
  /** Offset of the first byte in the image. */
  at: number;
  type: FieldType;
  /** Bytes of an ascii or bcd field. */
  length?: number;
  /** All bits of a fixed field: 8, 16, 24 or 32. */
  bits?: number;
  /** Bits behind the point of a fixed field: value = stored / 2^fraction. */
  fraction?: number;
  /** Of a fixed field: two's complement. */
  signed?: boolean;
  /** Elements of an array, one behind the other; a single value where absent. */
  count?: number;
  /** Integers only: what the stored numbers are called. */
  enum?: Enumeration;
  byteOrder?: ByteOrder;
  /** Integers only: value of one step, in `unit`; 1 where absent. */
  scale?: number;
  /** Integers only: value stored as 0, in `unit`; 0 where absent. */
  bias?: number;
  unit?: string;
  /** Inclusive limits of the value before rounding, in `unit`. */
  min?: number;
  max?: number;
  description?: string;
  value: FieldValue;
}

/** A cyclic redundancy check by its parameters; poly, init and xorout as hex digits, highest power first. */
export interface CrcDefinition {
  width: number;
  poly: string;
  init: string;
  refin: boolean;
  refout: boolean;
  xorout: string;
}

/** Sum of all bytes, kept to that many bits, then its complement. */
export interface SumDefinition {
  sum: number;
  complement?: Complement;
}

/** All bytes combined by exclusive or, then the complement. */
export interface XorDefinition {
  xor: number;
  complement?: Complement;
}

export type Complement = "none" | "ones" | "twos";

/** A catalogue name, e.g. `CRC-16/IBM-3740`, or a definition. */
export type ChecksumAlgorithm = string | CrcDefinition | SumDefinition | XorDefinition;

export interface LayoutChecksum {
  name: string;
  at: number;
  algorithm: ChecksumAlgorithm;
  byteOrder?: ByteOrder;
  /** One range, or several in the order in which they are run through. */
  over: ByteRange | ByteRange[];
  /** Values, as hex digits, that firmware does not take for a checksum, such as those of an erased memory. */
  forbid?: string[];
  /** What is stored instead of a forbidden value; an image that would need it is refused where absent. */
  instead?: string;
  description?: string;
}

export interface LayoutDocument {
  format: "trimwright/layout@1";
  /** Code of the family. */
  family: string;
  /** Semantic version without prerelease or build. */
  version: string;
  /** Range of firmware versions that read this layout. */
  firmware: string;
  /** Order of the compensation, 1 or 2. */
  order: 1 | 2;
  description?: string;
  memory: LayoutMemory;
  /** Ranges that belong to the device and are never written. */
  kept?: ByteRange[];
  /** Ranges that nothing may use: written as fill. */
  reserved?: ByteRange[];
  fields: LayoutField[];
  checksums: LayoutChecksum[];
}

/**
 * Checks the shape of a layout document against `layout.schema.json`.
 * @param json any parsed JSON.
 * @returns the same object typed, or every problem of shape with its JSON pointer (code `layout.shape`).
 */
export function parseLayout(
  json: unknown,
): { layout: LayoutDocument; problems?: undefined } | { layout?: undefined; problems: Problem[] } {
  const problems = shapeProblems(json);
  return problems.length > 0 ? { problems } : { layout: json as LayoutDocument };
}
