import { type FigureOptions, formatFigure } from "@/lib/domain/format/figure";

/** How a quantity is shown: stored value × `factor` is in `unit`, with `digits` decimals. */
export interface QuantityFormat {
  unit: string;
  factor: number;
  digits: number;
}

/**
 * Engineering units of everything that is shown. Stored: coefficients as in the contract (mV/V, mV/V/K, 1/K, …),
 * temperatures in °C, loads in kg, errors of the span in ppm or in verification intervals v.
 */
export const quantities = {
  gain: { unit: "1", factor: 1, digits: 6 },
  gainTc: { unit: "ppm/K", factor: 1e6, digits: 2 },
  gainTc2: { unit: "ppm/K²", factor: 1e6, digits: 4 },
  zero: { unit: "µV/V", factor: 1e3, digits: 3 },
  zeroTc: { unit: "nV/V/K", factor: 1e6, digits: 2 },
  zeroTc2: { unit: "nV/V/K²", factor: 1e6, digits: 4 },
  tempOffset: { unit: "°C", factor: 1, digits: 3 },
  tempSlope: { unit: "°C/unit", factor: 1, digits: 6 },
  temperature: { unit: "°C", factor: 1, digits: 2 },
  temperatureDifference: { unit: "K", factor: 1, digits: 2 },
  signal: { unit: "mV/V", factor: 1, digits: 6 },
  load: { unit: "kg", factor: 1, digits: 3 },
  spanErrorPpm: { unit: "ppm", factor: 1, digits: 1 },
  ratio: { unit: "of limit", factor: 1, digits: 2 },
  intervals: { unit: "v", factor: 1, digits: 2 },
  relativeStep: { unit: "ppm", factor: 1e6, digits: 2 },
} as const satisfies Record<string, QuantityFormat>;

export type QuantityName = keyof typeof quantities;

/** A device's coefficients in the order in which people read them. */
export const COEFFICIENT_QUANTITIES = [
  "gain",
  "gainTc",
  "gainTc2",
  "zero",
  "zeroTc",
  "zeroTc2",
  "tempOffset",
  "tempSlope",
] as const satisfies QuantityName[];

/** The figure of a stored value in its engineering unit, without the unit, for table cells. */
export function formatQuantity(
  name: QuantityName,
  value: number | null | undefined,
  options: Pick<FigureOptions, "sign" | "digits"> = {},
): string {
  const { factor, digits } = quantities[name];
  const shown = value === null || value === undefined ? null : value * factor;
  return formatFigure(shown, { digits: options.digits ?? digits, sign: options.sign });
}

/** The same with its unit: "−418.05 ppm/K". A quantity without unit stands alone. */
export function formatQuantityWithUnit(
  name: QuantityName,
  value: number | null | undefined,
  options: Pick<FigureOptions, "sign" | "digits"> = {},
): string {
  const figure = formatQuantity(name, value, options);
  const { unit } = quantities[name];
  return figure === "—" || unit === "1" ? figure : `${figure} ${unit}`;
}

/** Units of layout fields that have a finer engineering unit, by the unit the layout stores. */
const finerUnits: Record<string, { unit: string; factor: number }> = {
  "mV/V": { unit: "µV/V", factor: 1e3 },
  "mV/V/K": { unit: "nV/V/K", factor: 1e6 },
  "mV/V/K²": { unit: "nV/V/K²", factor: 1e6 },
  "1/K": { unit: "ppm/K", factor: 1e6 },
  "1/K²": { unit: "ppm/K²", factor: 1e6 },
};

/** A layout field's value in the engineering unit of its stored unit; unknown units stay as they are. */
export function toEngineering(value: number, unit: string | null | undefined): { value: number; unit: string } {
  const finer = finerUnits[unit ?? ""];
  return finer ? { value: value * finer.factor, unit: finer.unit } : { value, unit: unit ?? "" };
}
