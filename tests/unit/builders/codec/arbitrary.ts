import fc from "fast-check";
import { integerOf, type NumberType } from "@/builders/codec/field-types";
import type { ByteOrder, ChecksumAlgorithm, LayoutField } from "@/schemas/documents/layout";

/** A number field of an invented layout and a value that it takes. */
export interface NumberCase {
  field: Partial<LayoutField>;
  value: number;
}

export const byteOrder = fc.constantFrom<ByteOrder>("little", "big");

/** Scales as authors write them: decimal, binary, odd, of either sign. */
const scale = fc.oneof(
  fc.integer({ min: -12, max: 6 }).map((power) => 10 ** power),
  fc.integer({ min: -30, max: 6 }).map((power) => 2 ** power),
  fc.double({ min: 1e-9, max: 1e3, noNaN: true }),
  fc.integer({ min: 1, max: 9 }).map((step) => -step / 1e3),
);

/** Ends and middle of a type's steps, and halves between them. */
const stored = ({ min, max }: NumberType) =>
  fc.oneof(
    fc.constantFrom(min, max, 0, 0.5, 1.5, max / 2).map((step) => Math.max(min, Math.min(step, max))),
    fc.double({ min, max, noNaN: true }),
    fc.integer({ min: Math.max(min, -(2 ** 31)), max: Math.min(max, 2 ** 31 - 1) }),
  );

const scaled = (type: NumberType, field: Partial<LayoutField>): fc.Arbitrary<NumberCase> =>
  fc
    .tuple(stored(type), scale, fc.oneof(fc.constant(0), fc.double({ min: -100, max: 100, noNaN: true })))
    .map(([step, one, bias]) => ({ field: { ...field, scale: one, bias }, value: step * one + bias }));

const integers = (["u8", "i8", "u16", "i16", "u24", "i24", "u32", "i32"] as const).map((type) =>
  scaled(integerOf(Number(type.slice(1)), type.startsWith("i")), { type }),
);

const packedDecimal = fc
  .integer({ min: 1, max: 7 })
  .chain((length) =>
    scaled({ kind: "integer", width: length, min: 0, max: 10 ** (2 * length) - 1 }, { type: "bcd", length }),
  );

const fixedPoint = fc
  .tuple(fc.constantFrom(8, 16, 24, 32), fc.integer({ min: 0, max: 40 }), fc.boolean())
  .chain(([bits, fraction, signed]) =>
    stored(integerOf(bits, signed)).map((step) => ({
      field: { type: "fixed" as const, bits, fraction, signed },
      value: step / 2 ** fraction,
    })),
  );

const bitFields = fc
  .tuple(fc.constantFrom("u8", "u16", "u24", "u32"), fc.nat(31), fc.integer({ min: 1, max: 32 }), fc.boolean())
  .filter(([type, from, width]) => from + width <= Number(type.slice(1)))
  .chain(([type, from, width, signed]) =>
    fc.tuple(stored(integerOf(width, signed)), scale).map(([step, one]) => ({
      field: {
        type: type as "u32",
        value: { bits: [{ name: "part", from, width, signed, scale: one, value: { const: step * one } }] },
      },
      value: step * one,
    })),
  );

const floats = fc.oneof(
  fc.float({ noNaN: true, noDefaultInfinity: true }).map((value) => ({ field: { type: "f32" as const }, value })),
  fc
    .double({ min: -3.4028234663852886e38, max: 3.4028234663852886e38, noNaN: true })
    .map((value) => ({ field: { type: "f32" as const }, value })),
  fc.double({ noNaN: true, noDefaultInfinity: true }).map((value) => ({ field: { type: "f64" as const }, value })),
);

/** Every type that holds numbers, at any scale it takes. */
export const numberCase: fc.Arbitrary<NumberCase> = fc.oneof(...integers, packedDecimal, fixedPoint, bitFields, floats);

/** Any check that a layout can name, with the size in bytes. */
export const algorithm: fc.Arbitrary<ChecksumAlgorithm> = fc.oneof(
  fc.constantFrom("CRC-8/SMBUS", "CRC-8/MAXIM-DOW", "CRC-16/IBM-3740", "CRC-16/MODBUS", "CRC-32/ISO-HDLC"),
  fc
    .record({
      width: fc.constantFrom(8, 16, 24, 32),
      poly: fc.nat(0x7fff_ffff),
      init: fc.nat(0x7fff_ffff),
      refin: fc.boolean(),
      refout: fc.boolean(),
      xorout: fc.nat(0x7fff_ffff),
    })
    .map(({ width, poly, init, xorout, ...flags }) => {
      const hex = (value: number) => (value % 2 ** width).toString(16);
      return { width, poly: hex(poly | 1), init: hex(init), xorout: hex(xorout), ...flags };
    }),
  fc.record({
    sum: fc.constantFrom(8, 16, 32),
    complement: fc.constantFrom<"none" | "ones" | "twos">("none", "ones", "twos"),
  }),
  fc.record({
    xor: fc.constant(8),
    complement: fc.constantFrom<"none" | "ones" | "twos">("none", "ones", "twos"),
  }),
);
