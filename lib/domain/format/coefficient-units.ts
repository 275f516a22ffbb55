import type { COEFFICIENT_QUANTITIES } from "./quantity";

export type CoefficientName = (typeof COEFFICIENT_QUANTITIES)[number];

/** Units in which coefficients are stored and exchanged (contract, section 3): those of exports, not of the screen. */
export const STORED_UNITS: Record<CoefficientName, string> = {
  gain: "1",
  gainTc: "1/K",
  gainTc2: "1/K²",
  zero: "mV/V",
  zeroTc: "mV/V/K",
  zeroTc2: "mV/V/K²",
  tempOffset: "°C",
  tempSlope: "°C/unit",
};
