import type { CompiledLayout } from "@/builders/codec/compile-layout";
import type { DecodedField } from "@/builders/codec/image";
import type { CoefficientValues } from "@/builders/codec/sources";
import { AppError } from "@/lib/errors";
import type { CoefficientName } from "@/schemas/documents/layout";

/** What a device computes with: its decoded coefficients and the reference temperature in °C. */
export interface Twin {
  coefficients: CoefficientValues;
  referenceTemperature: number;
}

/**
 * The device's arithmetic set up from a decoded image, so that what was built is judged by what the firmware will do.
 * The reference temperature is the image's where the layout stores one, else the family's.
 * @param decoded of the same layout, as {@link decodeImage} gives it.
 * @throws AppError `twin.coefficient_missing` {name} where the image holds no number for one that the order needs.
 */
export function twinOf(
  layout: CompiledLayout,
  decoded: readonly DecodedField[],
  family: { referenceTemperature: number },
): Twin {
  const numbers = new Map<string, number>();
  layout.fields.forEach((field, i) => {
    const value = decoded[i]?.value;
    if (field.source !== null && typeof value === "number") numbers.set(field.source, value);
  });
  const get = (name: CoefficientName): number => {
    const value = numbers.get(`coefficients.${name}`);
    if (value === undefined) {
      throw new AppError("twin.coefficient_missing", { name, message: `The image holds no number for ${name}` });
    }
    return value;
  };
  const second = layout.document.order === 2;
  return {
    coefficients: {
      tempOffset: get("tempOffset"),
      tempSlope: get("tempSlope"),
      zero: get("zero"),
      zeroTc: get("zeroTc"),
      zeroTc2: second ? get("zeroTc2") : null,
      gain: get("gain"),
      gainTc: get("gainTc"),
      gainTc2: second ? get("gainTc2") : null,
    },
    referenceTemperature: numbers.get("family.referenceTemperature") ?? family.referenceTemperature,
  };
}

/** Temperature in °C for a device's own reading u: tempOffset + tempSlope · u. */
export function twinTemperature(twin: Twin, deviceTemp: number): number {
  return twin.coefficients.tempOffset + twin.coefficients.tempSlope * deviceTemp;
}

/**
 * Corrected output y = (s − zero(d)) · gain(d) in mV/V, with d = t − R, zero(d) = zero + zeroTc·d (+ zeroTc2·d²) and
 * gain(d) = gain·(1 + gainTc·d (+ gainTc2·d²)) (contract, section 3).
 * @param signal uncompensated output s in mV/V.
 * @param deviceTemp the device's own temperature reading in its own unit.
 */
export function twinOutput(twin: Twin, signal: number, deviceTemp: number): number {
  const { zero, zeroTc, zeroTc2, gain, gainTc, gainTc2 } = twin.coefficients;
  const d = twinTemperature(twin, deviceTemp) - twin.referenceTemperature;
  const zeroAtD = zero + zeroTc * d + (zeroTc2 ?? 0) * d * d;
  return (signal - zeroAtD) * gain * (1 + gainTc * d + (gainTc2 ?? 0) * d * d);
}
