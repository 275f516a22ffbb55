import semver from "semver";
import { COEFFICIENT_UNITS } from "@/builders/codec/mend/mend-fields";
import { coefficientsOfOrder } from "@/builders/codec/sources";
import { onOneLine } from "@/lib/domain/json-edits";
import { jsonPositions } from "@/lib/domain/json-positions";
import type { CoefficientName, FieldType, LayoutDocument, LayoutField } from "@/schemas/documents/layout";

/** A shape to begin a layout with; all but the empty one can be encoded as they stand. */
export interface Template {
  id: string;
  name: string;
  /** Which firmware it suits. */
  text: string;
  make: (family: string) => LayoutDocument;
}

const version: LayoutField[] = [
  { name: "layoutMajor", at: 0, type: "u8", value: { from: "layout.major" } },
  { name: "layoutMinor", at: 1, type: "u8", value: { from: "layout.minor" } },
];
const serial = (at: number, length: number): LayoutField => ({
  name: "serial",
  at,
  type: "ascii",
  length,
  value: { from: "device.serial" },
});

/** Scales of integers that leave a step far below what a cell resolves, and the limits that they bring. */
const FINE: Record<CoefficientName, { scale: number; bias?: number; min: number; max: number }> = {
  tempOffset: { scale: 1e-4, min: -500, max: 500 },
  tempSlope: { scale: 1e-7, min: 0.01, max: 0.8 },
  zero: { scale: 1e-7, min: -0.5, max: 0.5 },
  zeroTc: { scale: 1e-10, min: -0.0008, max: 0.0008 },
  zeroTc2: { scale: 1e-12, min: -8e-6, max: 8e-6 },
  gain: { scale: 1e-7, bias: 1, min: 0.5, max: 1.5 },
  gainTc: { scale: 1e-9, min: -0.002, max: 0.002 },
  gainTc2: { scale: 1e-11, min: -2e-5, max: 2e-5 },
};

function floats(at: number, order: 1 | 2, suffix = ""): LayoutField[] {
  return coefficientsOfOrder(order).map((name, i) => ({
    name: `${name}${suffix}`,
    at: at + 4 * i,
    type: "f32",
    unit: COEFFICIENT_UNITS[name],
    value: { from: `coefficients.${name}` },
  }));
}

function integers(at: number, type: FieldType, width: number): LayoutField[] {
  return coefficientsOfOrder(1).map((name, i) => ({
    name,
    at: at + width * i,
    type,
    ...FINE[name],
    unit: COEFFICIENT_UNITS[name],
    value: { from: `coefficients.${name}` },
  }));
}

function layoutOf(
  family: string,
  change: Partial<LayoutDocument>,
  memory: Partial<LayoutDocument["memory"]> = {},
): LayoutDocument {
  return {
    format: "trimwright/layout@1",
    family,
    version: "1.0.0",
    firmware: ">=1.0.0 <2.0.0",
    order: 1,
    memory: { bytes: 64, pageBytes: 16, baseAddress: 0, fill: 255, byteOrder: "little", ...memory },
    fields: [],
    checksums: [],
    ...change,
  };
}

const crc16 = (name: string, at: number, from: number, to: number) => ({
  name,
  at,
  algorithm: "CRC-16/IBM-3740",
  over: [from, to] as [number, number],
});

export const templates: readonly Template[] = [
  {
    id: "floats",
    name: "Little-endian floats, one checksum",
    text: "For firmware that computes in binary32 and reads its values in one block.",
    make: (family) =>
      layoutOf(family, {
        fields: [...version, serial(2, 20), ...floats(32, 1)],
        checksums: [crc16("imageCrc", 62, 0, 61)],
      }),
  },
  {
    id: "words",
    name: "Big-endian 24-bit words, one checksum",
    text: "For fixed-point firmware: every coefficient a 24-bit integer with its scale.",
    make: (family) =>
      layoutOf(
        family,
        {
          fields: [...version, serial(2, 20), ...integers(32, "i24", 3).map(padded)],
          checksums: [crc16("imageCrc", 62, 0, 61)],
        },
        { byteOrder: "big" },
      ),
  },
  {
    id: "copies",
    name: "Two copies, each with its checksum",
    text: "For firmware that falls back to the second copy when a write was cut short.",
    make: (family) =>
      layoutOf(
        family,
        {
          fields: [...version, serial(2, 20), ...floats(32, 1), ...floats(96, 1, "Copy")],
          checksums: [crc16("headCrc", 30, 0, 29), crc16("firstCrc", 62, 32, 61), crc16("secondCrc", 126, 96, 125)],
        },
        { bytes: 128, pageBytes: 32 },
      ),
  },
  {
    id: "square",
    name: "Floats of order 2",
    text: "For firmware with a square term of temperature for zero and gain.",
    make: (family) =>
      layoutOf(
        family,
        { order: 2, fields: [...version, serial(2, 20), ...floats(32, 2)], checksums: [crc16("imageCrc", 94, 0, 93)] },
        { bytes: 96, pageBytes: 32 },
      ),
  },
  {
    id: "empty",
    name: "Empty",
    text: "Memory and nothing in it; the field table or the text fills it.",
    make: (family) => layoutOf(family, {}),
  },
];

/** 24-bit words at even addresses, so that a 16-bit core reads them in whole words. */
function padded(field: LayoutField, i: number): LayoutField {
  return { ...field, at: 32 + 4 * i };
}

/** A template's text: a line a field, as people read it best. */
export function templateText({ make }: Template, family: string): string {
  const { fields, checksums, ...head } = make(family);
  const lines = (list: readonly object[]) =>
    list.length === 0 ? "[]" : `[\n${list.map((part) => `    ${onOneLine(part)}`).join(",\n")}\n  ]`;
  const members = Object.entries(head).map(([name, value]) => `  "${name}": ${onOneLine(value)}`);
  return `{\n${[...members, `  "fields": ${lines(fields)}`, `  "checksums": ${lines(checksums)}`].join(",\n")}\n}\n`;
}

/** A text that continues another layout: its own, with the first free minor version. */
export function continuedText(source: string, from: string, taken: readonly string[]): string {
  let next = semver.inc(from, "minor") as string;
  while (taken.includes(next)) next = semver.inc(next, "minor") as string;
  const span = jsonPositions(source).get("/version");
  return span ? `${source.slice(0, span.from)}"${next}"${source.slice(span.end)}` : source;
}
