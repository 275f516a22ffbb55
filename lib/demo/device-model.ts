/** The demo's load cells: each drifts by parameters drawn from its family's, as `families.ts` states them. */
import type { FamilyDocument } from "@/schemas/api/families";
import type { Random } from "./random";

/** Mean and standard deviation. */
export type Spread = readonly [mean: number, standardDeviation: number];

export interface DriftParameters {
  zeroMvV: Spread;
  zeroMvVPerK: Spread;
  zeroMvVPerK2: Spread;
  /** Deviation of the sensitivity from nominal, as a share. */
  sensitivity: Spread;
  sensitivityPerK: Spread;
  sensitivityPerK2: Spread;
  /** Counts of the device's own thermometer at 0 °C, and per kelvin. */
  countsAtZeroC: Spread;
  countsPerK: Spread;
  /** Noise of one reading. */
  noiseMvV: number;
  noiseCounts: number;
}

export interface ModelDevice {
  serial: string;
  hardwareId: string;
  zero: readonly [number, number, number];
  sensitivity: readonly [number, number, number];
  thermometer: readonly [counts: number, perK: number];
}

/** Draws a device. */
export function drawDevice(random: Random, parameters: DriftParameters, serial: string): ModelDevice {
  const draw = ([mean, deviation]: Spread) => random.normal(mean, deviation);
  const hardwareId = Math.floor(random.uniform() * 2 ** 32)
    .toString(16)
    .toUpperCase()
    .padStart(8, "0");
  return {
    serial,
    hardwareId: `B-${hardwareId}`,
    zero: [draw(parameters.zeroMvV), draw(parameters.zeroMvVPerK), draw(parameters.zeroMvVPerK2)],
    sensitivity: [draw(parameters.sensitivity), draw(parameters.sensitivityPerK), draw(parameters.sensitivityPerK2)],
    thermometer: [draw(parameters.countsAtZeroC), draw(parameters.countsPerK)],
  };
}

/** Uncompensated output in mV/V at a true temperature in °C under a load in kg, without noise. */
export function signalMvV(device: ModelDevice, family: FamilyDocument, temperatureC: number, loadKg: number): number {
  const d = temperatureC - family.referenceC;
  const [z0, z1, z2] = device.zero;
  const [s0, s1, s2] = device.sensitivity;
  const sensitivity = family.nominalMvV * (1 + s0) * (1 + s1 * d + s2 * d * d);
  return z0 + z1 * d + z2 * d * d + (sensitivity * loadKg) / family.capacityKg;
}

/** What the device's own thermometer reads, in counts, without noise. */
export function thermometerCounts(device: ModelDevice, temperatureC: number): number {
  return device.thermometer[0] + device.thermometer[1] * temperatureC;
}
