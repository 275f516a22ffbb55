import type { ImageSources } from "@/builders/codec/sources";
import type { LayoutDocument, LayoutField } from "@/schemas/documents/layout";

/** A small layout that holds every coefficient of order 1, the serial and a checksum; free of findings. */
export function smallLayout(change: Partial<LayoutDocument> = {}): LayoutDocument {
  const f32 = (name: string, at: number): LayoutField => ({
    name,
    at,
    type: "f32",
    value: { from: `coefficients.${name}` } as LayoutField["value"],
  });
  return {
    format: "trimwright/layout@1",
    family: "LC-1",
    version: "1.0.0",
    firmware: ">=1.0.0 <2.0.0",
    order: 1,
    memory: { bytes: 64, pageBytes: 16, baseAddress: 0, fill: 255, byteOrder: "little" },
    fields: [
      { name: "serial", at: 0, type: "ascii", length: 12, value: { from: "device.serial" } },
      f32("tempOffset", 16),
      f32("tempSlope", 20),
      f32("zero", 24),
      f32("zeroTc", 28),
      f32("gain", 32),
      { name: "gainTc", at: 36, type: "i32", scale: 1e-12, unit: "1/K", value: { from: "coefficients.gainTc" } },
      { name: "version", at: 40, type: "u16", value: { from: "package.minor" } },
    ],
    checksums: [{ name: "sum", at: 62, algorithm: "CRC-16/MODBUS", over: [0, 61] }],
    ...change,
  };
}

/** A layout of one field at byte 0 of 32 and a checksum behind it. */
export function oneFieldLayout(field: Partial<LayoutField>): LayoutDocument {
  return smallLayout({
    fields: [{ name: "one", at: 0, type: "u8", value: { const: 0 }, ...field }],
    memory: { bytes: 32, pageBytes: 16, baseAddress: 0, fill: 255, byteOrder: "little" },
    checksums: [{ name: "sum", at: 30, algorithm: "CRC-16/IBM-3740", over: [0, 29] }],
  });
}

/** Sources of an invented device. */
export function plainSources(change: Partial<ImageSources> = {}): ImageSources {
  return {
    device: { serial: "LC1-00007" },
    lot: { code: "LC1-A" },
    layout: { major: 1, minor: 0, patch: 0 },
    package: { major: 1, minor: 2, patch: 3 },
    coefficients: { tempOffset: -200, tempSlope: 0.125, zero: 0.01, zeroTc: 1e-5, gain: 1.001, gainTc: -4e-4 },
    family: { referenceTemperature: 20, capacity: 20, nominalOutput: 2 },
    ...change,
  };
}
