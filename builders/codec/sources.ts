import type { CoefficientName, SourceName } from "@/schemas/documents/layout";

/** Three version numbers, each a non-negative integer. */
export interface VersionNumbers {
  major: number;
  minor: number;
  patch: number;
}

/**
 * Coefficients of one device (contract, section 3): tempOffset °C, tempSlope °C per unit of the device's reading,
 * zero mV/V, zeroTc mV/V/K, zeroTc2 mV/V/K², gain without unit, gainTc 1/K, gainTc2 1/K². Second order may be missing.
 */
export interface CoefficientValues {
  tempOffset: number;
  tempSlope: number;
  zero: number;
  zeroTc: number;
  zeroTc2?: number | null;
  gain: number;
  gainTc: number;
  gainTc2?: number | null;
}

/** Everything that an image can be encoded from. referenceTemperature °C, capacity kg, nominalOutput mV/V. */
export interface ImageSources {
  device: { serial: string };
  lot: { code: string };
  layout: VersionNumbers;
  package: VersionNumbers;
  coefficients: CoefficientValues;
  family: { referenceTemperature: number; capacity: number; nominalOutput: number };
}

type Reader = (sources: ImageSources) => number | string | null | undefined;

const coefficient =
  (name: CoefficientName): Reader =>
  (sources) =>
    sources.coefficients[name];

/** One reader a source, so that a layout is resolved once and not once a device. */
export const SOURCE_READERS: Readonly<Record<SourceName, Reader>> = {
  "device.serial": (s) => s.device.serial,
  "lot.code": (s) => s.lot.code,
  "layout.major": (s) => s.layout.major,
  "layout.minor": (s) => s.layout.minor,
  "layout.patch": (s) => s.layout.patch,
  "package.major": (s) => s.package.major,
  "package.minor": (s) => s.package.minor,
  "package.patch": (s) => s.package.patch,
  "coefficients.tempOffset": coefficient("tempOffset"),
  "coefficients.tempSlope": coefficient("tempSlope"),
  "coefficients.zero": coefficient("zero"),
  "coefficients.zeroTc": coefficient("zeroTc"),
  "coefficients.zeroTc2": coefficient("zeroTc2"),
  "coefficients.gain": coefficient("gain"),
  "coefficients.gainTc": coefficient("gainTc"),
  "coefficients.gainTc2": coefficient("gainTc2"),
  "family.referenceTemperature": (s) => s.family.referenceTemperature,
  "family.capacity": (s) => s.family.capacity,
  "family.nominalOutput": (s) => s.family.nominalOutput,
};

export const SOURCE_NAMES = Object.keys(SOURCE_READERS) as SourceName[];

/** True for sources that are text; the others are numbers. */
export function isTextSource(name: SourceName): boolean {
  return name === "device.serial" || name === "lot.code";
}

/** True for a source that only tells the version of layout or package. */
export function isVersionSource(name: SourceName): boolean {
  return name.startsWith("package.") || name.startsWith("layout.");
}

/** Coefficients that a device's firmware needs for an order. */
export function coefficientsOfOrder(order: 1 | 2): CoefficientName[] {
  const linear: CoefficientName[] = ["tempOffset", "tempSlope", "zero", "zeroTc", "gain", "gainTc"];
  return order === 1 ? linear : [...linear, "zeroTc2", "gainTc2"];
}
