import semver from "semver";
import { type LayoutCell, listCells } from "@/builders/codec/layout-cells";
import type { FamilyRulesLike } from "@/builders/codec/lint/lint";
import type { ImageSources } from "@/builders/codec/sources";
import type { LayoutDocument, SourceName } from "@/schemas/documents/layout";

/** Plausible values for a cell with a digital thermometer of about 0.12 °C a step; invented. */
const TYPICAL: Readonly<Record<string, number>> = {
  "package.major": 1,
  "package.minor": 0,
  "package.patch": 0,
  "coefficients.tempOffset": -228.5,
  "coefficients.tempSlope": 0.1237,
  "coefficients.zero": 0.0125,
  "coefficients.zeroTc": -1.25e-5,
  "coefficients.zeroTc2": 4e-8,
  "coefficients.gain": 1.0025,
  "coefficients.gainTc": -4.2e-4,
  "coefficients.gainTc2": 3e-7,
  "family.referenceTemperature": 20,
  "family.capacity": 20,
  "family.nominalOutput": 2,
};

/**
 * Sources of an invented device, the same every time, to show a layout encoded while it is written. A typical value that
 * a field's limits or type refuse gives way to the middle of what the field takes.
 * @param layout must be free of structural problems (see {@link compileLayout}).
 */
export function sampleSources(layout: LayoutDocument, family?: FamilyRulesLike): ImageSources {
  const version = semver.parse(layout.version);
  const number = (name: SourceName) => sampleNumber(layout, name);
  return {
    device: { serial: sampleText(layout, "device.serial", `${layout.family}-0001`) },
    lot: { code: sampleText(layout, "lot.code", `${layout.family}-LOT`) },
    layout: { major: version?.major ?? 0, minor: version?.minor ?? 0, patch: version?.patch ?? 0 },
    package: { major: number("package.major"), minor: number("package.minor"), patch: number("package.patch") },
    coefficients: {
      tempOffset: number("coefficients.tempOffset"),
      tempSlope: number("coefficients.tempSlope"),
      zero: number("coefficients.zero"),
      zeroTc: number("coefficients.zeroTc"),
      zeroTc2: number("coefficients.zeroTc2"),
      gain: number("coefficients.gain"),
      gainTc: number("coefficients.gainTc"),
      gainTc2: number("coefficients.gainTc2"),
    },
    family: {
      referenceTemperature: family?.referenceC ?? number("family.referenceTemperature"),
      capacity: family?.capacityKg ?? number("family.capacity"),
      nominalOutput: family?.nominalMvV ?? number("family.nominalOutput"),
    },
  };
}

function cellsFrom(layout: LayoutDocument, name: SourceName): LayoutCell[] {
  const cells = layout.fields.flatMap((field, i) => listCells(field, `/fields/${i}`));
  return cells.filter(({ value }) => "from" in value && value.from === name);
}

function sampleNumber(layout: LayoutDocument, name: SourceName): number {
  const cells = cellsFrom(layout, name);
  const named = cells.flatMap((cell) => (cell.names ? Object.values(cell.names) : []));
  if (named[0] !== undefined) return named[0];
  const ranges = cells.map(rangeOf);
  const min = Math.max(...ranges.map((range) => range[0]), Number.NEGATIVE_INFINITY);
  const max = Math.min(...ranges.map((range) => range[1]), Number.POSITIVE_INFINITY);
  const typical = TYPICAL[name] as number;
  return typical >= min && typical <= max ? typical : min / 2 + max / 2;
}

/** What a value takes: its limits cut to what its type can store. */
function rangeOf({ number, scale, bias, ...limits }: LayoutCell): [min: number, max: number] {
  const { min = Number.NEGATIVE_INFINITY, max = Number.POSITIVE_INFINITY } = limits;
  if (!number) return [min, max];
  const ends = [number.min * scale + bias, number.max * scale + bias];
  return [Math.max(min, Math.min(...ends)), Math.min(max, Math.max(...ends))];
}

function sampleText(layout: LayoutDocument, name: SourceName, text: string): string {
  const widths = cellsFrom(layout, name).map((cell) => cell.width);
  return text.slice(0, Math.min(text.length, ...widths));
}
