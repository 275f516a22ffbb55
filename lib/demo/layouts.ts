/** Layouts of the demo's families, as their authors would have written them. */
import type { CoefficientName, LayoutDocument, LayoutField } from "@/schemas/documents/layout";

const version = (at: number): LayoutField[] => [
  { name: "layoutMajor", at, type: "u8", value: { from: "layout.major" } },
  { name: "layoutMinor", at: at + 1, type: "u8", value: { from: "layout.minor" } },
];

const benchFields: LayoutField[] = [
  ...version(0),
  { name: "serial", at: 2, type: "ascii", length: 20, value: { from: "device.serial" } },
  { name: "packageMajor", at: 24, type: "u16", value: { from: "package.major" } },
  { name: "packageMinor", at: 26, type: "u16", value: { from: "package.minor" } },
  { name: "packagePatch", at: 28, type: "u16", value: { from: "package.patch" } },
  {
    name: "tempOffset",
    at: 32,
    type: "f32",
    unit: "°C",
    min: -500,
    max: 500,
    value: { from: "coefficients.tempOffset" },
  },
  {
    name: "tempSlope",
    at: 36,
    type: "f32",
    unit: "°C/1",
    min: 0.01,
    max: 1,
    value: { from: "coefficients.tempSlope" },
  },
  {
    name: "refTemperature",
    at: 40,
    type: "i16",
    scale: 0.01,
    unit: "°C",
    value: { from: "family.referenceTemperature" },
  },
  {
    name: "zero",
    at: 48,
    type: "i24",
    scale: 1e-6,
    unit: "mV/V",
    min: -0.5,
    max: 0.5,
    value: { from: "coefficients.zero" },
  },
  {
    name: "zeroTc",
    at: 51,
    type: "i24",
    scale: 1e-10,
    unit: "mV/V/K",
    min: -0.0008,
    max: 0.0008,
    value: { from: "coefficients.zeroTc" },
  },
  {
    name: "gain",
    at: 54,
    type: "u32",
    scale: 2.5e-10,
    bias: 0.5,
    unit: "1",
    min: 0.8,
    max: 1.2,
    value: { from: "coefficients.gain" },
  },
  {
    name: "gainTc",
    at: 58,
    type: "i32",
    scale: 1e-12,
    unit: "1/K",
    min: -0.002,
    max: 0.002,
    value: { from: "coefficients.gainTc" },
  },
];

const benchCapacity: LayoutField = {
  name: "capacity",
  at: 64,
  type: "u16",
  scale: 0.1,
  unit: "kg",
  value: { from: "family.capacity" },
};

const benchLayout: LayoutDocument = {
  format: "trimwright/layout@1",
  family: "MW-20",
  version: "1.0.0",
  firmware: ">=2.1.0 <3.0.0",
  order: 1,
  memory: { bytes: 128, pageBytes: 16, baseAddress: 0, fill: 255, byteOrder: "little" },
  fields: benchFields,
  checksums: [{ name: "imageCrc", at: 126, algorithm: "CRC-16/IBM-3740", over: [0, 125] }],
};

/** First layout of MW-20, one that adds the capacity, and one that a second person has to look at. */
export const benchLayouts = {
  first: benchLayout,
  withCapacity: { ...benchLayout, version: "1.1.0", fields: [...benchFields, benchCapacity] },
  withLot: {
    ...benchLayout,
    version: "1.2.0",
    fields: [
      ...benchFields,
      benchCapacity,
      { name: "lot", at: 80, type: "ascii", length: 16, value: { from: "lot.code" } } satisfies LayoutField,
    ],
  },
} satisfies Record<string, LayoutDocument>;

const single = (name: string, at: number, unit: string, from: `coefficients.${CoefficientName}`): LayoutField => ({
  name,
  at,
  type: "f32",
  unit,
  value: { from },
});

/** The layout of MW-300: quadratic, big-endian, with a counter that belongs to the device. */
export const floorLayout: LayoutDocument = {
  format: "trimwright/layout@1",
  family: "MW-300",
  version: "1.0.0",
  firmware: "^4.0.0",
  order: 2,
  memory: { bytes: 96, pageBytes: 32, baseAddress: 0, fill: 0, byteOrder: "big" },
  kept: [[88, 91]],
  fields: [
    { name: "mark", at: 0, type: "bytes", value: { const: "4D57" } },
    ...version(2),
    { name: "serial", at: 4, type: "ascii", length: 20, value: { from: "device.serial" } },
    { name: "packageMajor", at: 24, type: "u16", value: { from: "package.major" } },
    { name: "packageMinor", at: 26, type: "u16", value: { from: "package.minor" } },
    { name: "packagePatch", at: 28, type: "u16", value: { from: "package.patch" } },
    single("tempOffset", 32, "°C", "coefficients.tempOffset"),
    single("tempSlope", 36, "°C/1", "coefficients.tempSlope"),
    single("zero", 40, "mV/V", "coefficients.zero"),
    single("zeroTc", 44, "mV/V/K", "coefficients.zeroTc"),
    single("zeroTc2", 48, "mV/V/K²", "coefficients.zeroTc2"),
    single("gain", 52, "1", "coefficients.gain"),
    single("gainTc", 56, "1/K", "coefficients.gainTc"),
    single("gainTc2", 60, "1/K²", "coefficients.gainTc2"),
    { name: "capacity", at: 64, type: "u16", scale: 0.1, unit: "kg", value: { from: "family.capacity" } },
    {
      name: "refTemperature",
      at: 66,
      type: "i16",
      scale: 0.01,
      unit: "°C",
      value: { from: "family.referenceTemperature" },
    },
  ],
  checksums: [{ name: "body", at: 92, algorithm: "CRC-32/ISO-HDLC", over: [0, 87] }],
};
