import semver from "semver";
import { jsonPositions } from "@/lib/domain/json-positions";
import type { LayoutDocument } from "@/schemas/documents/layout";

const coefficients = [
  { name: "tempOffset", unit: "°C" },
  { name: "tempSlope", unit: "°C/1" },
  { name: "zero", unit: "mV/V" },
  { name: "zeroTc", unit: "mV/V/K" },
  { name: "gain", unit: "1" },
  { name: "gainTc", unit: "1/K" },
] as const;

/** A first layout that can be encoded as it stands: the serial, every coefficient as f32, one checksum. */
export function startingText(family: string): string {
  const fields: LayoutDocument["fields"] = [
    { name: "layoutMajor", at: 0, type: "u8", value: { from: "layout.major" } },
    { name: "layoutMinor", at: 1, type: "u8", value: { from: "layout.minor" } },
    { name: "serial", at: 2, type: "ascii", length: 20, value: { from: "device.serial" } },
    ...coefficients.map(({ name, unit }, i) => ({
      name,
      at: 32 + 4 * i,
      type: "f32" as const,
      unit,
      value: { from: `coefficients.${name}` as const },
    })),
  ];
  const layout: LayoutDocument = {
    format: "trimwright/layout@1",
    family,
    version: "1.0.0",
    firmware: ">=1.0.0 <2.0.0",
    order: 1,
    memory: { bytes: 64, pageBytes: 16, baseAddress: 0, fill: 255, byteOrder: "little" },
    fields,
    checksums: [{ name: "imageCrc", at: 62, algorithm: "CRC-16/IBM-3740", over: [0, 61] }],
  };
  return JSON.stringify(layout, null, 2);
}

/** A text that continues another layout: its own, with the first free minor version. */
export function continuedText(source: string, version: string, taken: readonly string[]): string {
  let next = semver.inc(version, "minor") as string;
  while (taken.includes(next)) next = semver.inc(next, "minor") as string;
  const span = jsonPositions(source).get("/version");
  return span ? `${source.slice(0, span.from)}"${next}"${source.slice(span.end)}` : source;
}
