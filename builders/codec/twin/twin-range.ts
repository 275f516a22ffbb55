import { type Twin, twinTemperature } from "@/builders/codec/twin/twin";
import type { FamilyRules } from "@/lib/domain/compensation/types";

/** Largest finite binary32, which firmware commonly computes with (common practice, no source). */
const BINARY32_MAX = (2 - 2 ** -23) * 2 ** 127;

/** Temperatures looked at, ends included. */
const STEPS = 16;

/** What can be said of a device over its family's temperature range, measured there or not. */
export interface TwinRange {
  /** First quantity that is beyond binary32, or a gain that is not above 0; null where there is none. */
  overflow: { quantity: "temperature" | "zero" | "gain" | "output"; atC: number } | null;
  /** Largest change of the span by rounding, sign-free; null where something overflows. */
  spanRounding: { ppm: number; atC: number } | null;
  /** Largest change of the unloaded output by rounding, sign-free, mV/V. */
  zeroRounding: { mvV: number; atC: number } | null;
}

interface State {
  zero: number;
  gain: number;
}

/**
 * Overflow and rounding over the family's range. Says nothing about errors: outside the measured temperatures only the
 * arithmetic is known, not the cell.
 * @param exact the same device with its coefficients before they were stored.
 */
export function twinRange(
  twin: Twin,
  exact: Twin,
  family: Pick<FamilyRules, "temperatureMinC" | "temperatureMaxC" | "nominalMvV">,
): TwinRange {
  const { temperatureMinC: low, temperatureMaxC: high, nominalMvV } = family;
  const range: TwinRange = { overflow: null, spanRounding: null, zeroRounding: null };
  for (let i = 0; i <= STEPS; i++) {
    const atC = low + ((high - low) * i) / STEPS;
    // What the device's own thermometer reads there, by the coefficients as derived.
    const deviceTemp = (atC - exact.coefficients.tempOffset) / exact.coefficients.tempSlope;
    const should = stateAt(exact, deviceTemp);
    const does = stateAt(twin, deviceTemp);
    const quantity = overflowOf(deviceTemp, does, nominalMvV / should.gain, should.zero);
    if (quantity) return { overflow: { quantity, atC }, spanRounding: null, zeroRounding: null };
    const ppm = Math.abs(does.gain / should.gain - 1) * 1e6;
    const mvV = Math.abs((should.zero - does.zero) * does.gain);
    if (ppm > (range.spanRounding?.ppm ?? -1)) range.spanRounding = { ppm, atC };
    if (mvV > (range.zeroRounding?.mvV ?? -1)) range.zeroRounding = { mvV, atC };
  }
  return range;
}

function stateAt(twin: Twin, deviceTemp: number): State {
  const { zero, zeroTc, zeroTc2, gain, gainTc, gainTc2 } = twin.coefficients;
  const d = twinTemperature(twin, deviceTemp) - twin.referenceTemperature;
  return { zero: zero + zeroTc * d + (zeroTc2 ?? 0) * d * d, gain: gain * (1 + gainTc * d + (gainTc2 ?? 0) * d * d) };
}

/** @param spanMvV signal at capacity, mV/V. */
function overflowOf(
  deviceTemp: number,
  { zero, gain }: State,
  spanMvV: number,
  signalMvV: number,
): NonNullable<TwinRange["overflow"]>["quantity"] | null {
  const holds = (value: number) => Math.abs(value) <= BINARY32_MAX;
  if (!holds(deviceTemp)) return "temperature";
  if (!holds(zero)) return "zero";
  if (!holds(gain) || gain <= 0) return "gain";
  return holds((signalMvV + spanMvV - zero) * gain) ? null : "output";
}
