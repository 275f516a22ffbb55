import type { FamilyRules, Purpose, Reading, RunReadings } from "@/lib/domain/compensation/types";

/** A family with round numbers: 3000 intervals of 2 mV/V, 20 kg, reference 20 °C. */
export const family: FamilyRules = {
  code: "MW-20",
  capacityKg: 20,
  nominalMvV: 2,
  referenceC: 20,
  accuracyClass: "C",
  intervals: 3000,
  vMinRatioY: 10_000,
  pLc: 0.7,
  temperatureMinC: 10,
  temperatureMaxC: 40,
  minSoakMinutes: 90,
  minLoadFraction: 0.5,
  minTemperatureSpanK: 20,
  temperatureShare: 0.7,
  coverage: 0.95,
  confidence: 0.95,
};

/** A load cell that is exactly what the formula says. */
export interface IdealCell {
  serial: string;
  zero: number;
  zeroTc: number;
  zeroTc2?: number;
  gain: number;
  gainTc: number;
  gainTc2?: number;
  tempOffset: number;
  tempSlope: number;
  position?: string;
}

export function idealCell(serial: string, change: Partial<IdealCell> = {}): IdealCell {
  return {
    serial,
    zero: -0.01,
    zeroTc: 2e-5,
    gain: 1.002,
    gainTc: -4e-4,
    tempOffset: -230,
    tempSlope: 0.125,
    ...change,
  };
}

/** Signal of the cell, mV/V, at a true temperature under a load. */
export function signalOf(cell: IdealCell, temperatureC: number, loadKg: number): number {
  const d = temperatureC - family.referenceC;
  const gain = cell.gain * (1 + (cell.gainTc + (cell.gainTc2 ?? 0) * d) * d);
  const span = family.nominalMvV / gain;
  return cell.zero + (cell.zeroTc + (cell.zeroTc2 ?? 0) * d) * d + (span * loadKg) / family.capacityKg;
}

/** Errors of one row, by what they are errors of. */
export interface RowErrors {
  signalMvV?: (row: Reading) => number;
  /** Indicated less true. */
  chamberC?: (row: Reading) => number;
  /** Of the device's thermometer, K. */
  deviceK?: (row: Reading) => number;
}

export interface RunDesign {
  purpose: Purpose;
  temperaturesC: readonly number[];
  /** Loads of a point, in order, kg. */
  loads: readonly number[];
  dwellS?: number;
}

const MINUTES = 60_000;

/** The readings of cells in a run, rows six minutes apart, points three hours. */
export function madeUpRun(design: RunDesign, cells: readonly IdealCell[], errors: RowErrors = {}): RunReadings {
  const readings: Reading[] = [];
  for (const cell of cells)
    design.temperaturesC.forEach((temperatureC, index) => {
      design.loads.forEach((loadKg, i) => {
        const soakMin = 100 + 6 * i;
        const at = Date.UTC(2026, 2, 2, 8) + (index * 180 + soakMin) * MINUTES;
        const row: Reading = {
          row: readings.length + 2,
          serial: cell.serial,
          point: index + 1,
          chamberC: temperatureC,
          soakMin,
          deviceTemp: (temperatureC - cell.tempOffset) / cell.tempSlope,
          loadKg,
          signalMvV: signalOf(cell, temperatureC, loadKg),
          takenAt: new Date(at).toISOString(),
          position: cell.position ?? null,
          dwellS: loadKg > 0 ? (design.dwellS ?? null) : null,
        };
        row.signalMvV += errors.signalMvV?.(row) ?? 0;
        row.deviceTemp += (errors.deviceK?.(row) ?? 0) / cell.tempSlope;
        row.chamberC += errors.chamberC?.(row) ?? 0;
        readings.push(row);
      });
    });
  return { id: `run-${design.purpose}`, purpose: design.purpose, readings };
}

/** Standard normal values from a seed: the same ones at every call. Box and Muller over a linear congruence of 2^32. */
export function seededNormal(seed: number): () => number {
  let state = seed >>> 0;
  const uniform = () => {
    state = (Math.imul(state ^ (state >>> 15), 2246822519) + 0x9e3779b9) >>> 0;
    const mixed = Math.imul(state ^ (state >>> 13), 3266489917) >>> 0;
    return ((mixed ^ (mixed >>> 16)) >>> 0) / 2 ** 32;
  };
  return () => {
    const radius = Math.sqrt(-2 * Math.log(1 - uniform()));
    return radius * Math.cos(2 * Math.PI * uniform());
  };
}
