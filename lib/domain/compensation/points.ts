import { AppError } from "@/lib/errors";
import { rowsByDevice } from "./reading-groups";
import type { DevicePoint, Purpose, Reading } from "./types";

/** Temperatures closer than this count as one, K. */
const DISTINCT_K = 5;
/** Means of decimals differ from the decimal by rounding; 5 K written are 5 K. */
const ROUNDING_K = 1e-9;

interface PointSums {
  row: number;
  rows: number;
  chamberC: number;
  deviceTemp: number;
  unloaded: number;
  unloadedSignal: number;
  /** Signal and load of each loaded row, in the order of the rows. */
  loaded: number[];
}

/** The rows of one device in one run, gathered by point. */
export interface DeviceRows {
  points: Map<number, PointSums>;
  hardwareId: string | null;
}

/** Sums the rows of a run by device and point. Rows may come in any order. */
export function gatherReadings(readings: readonly Reading[]): Map<string, DeviceRows> {
  const devices = new Map<string, DeviceRows>();
  for (const [serial, byPoint] of rowsByDevice(readings)) {
    const device: DeviceRows = { points: new Map(), hardwareId: null };
    for (const [point, rows] of byPoint) device.points.set(point, sumRows(rows, device));
    devices.set(serial, device);
  }
  return devices;
}

function sumRows(rows: readonly Reading[], device: DeviceRows): PointSums {
  const sums: PointSums = {
    row: rows[0]?.row ?? 0,
    rows: rows.length,
    chamberC: 0,
    deviceTemp: 0,
    unloaded: 0,
    unloadedSignal: 0,
    loaded: [],
  };
  for (const reading of rows) {
    device.hardwareId ??= reading.hardwareId ?? null;
    sums.chamberC += reading.chamberC;
    sums.deviceTemp += reading.deviceTemp;
    if (reading.loadKg === 0) {
      sums.unloaded++;
      sums.unloadedSignal += reading.signalMvV;
    } else {
      sums.loaded.push(reading.signalMvV, reading.loadKg);
    }
  }
  return sums;
}

/**
 * Means of a device's points in rising point number: temperatures over all rows, zero over the unloaded ones, span as
 * the mean over the loaded ones of (signal − zero)·capacity/load (contract, section 3).
 * @throws AppError `reading.loaded_without_unloaded` {serial, point, row}.
 */
export function pointMeans(serial: string, rows: DeviceRows, purpose: Purpose, capacityKg: number): DevicePoint[] {
  const means: DevicePoint[] = [];
  for (const [point, sums] of rows.points) {
    if (sums.unloaded === 0) throw new AppError("reading.loaded_without_unloaded", { serial, point, row: sums.row });
    const zeroMvV = sums.unloadedSignal / sums.unloaded;
    means.push({
      purpose,
      point,
      chamberC: sums.chamberC / sums.rows,
      deviceTemp: sums.deviceTemp / sums.rows,
      zeroMvV,
      spanMvV: meanSpan(sums.loaded, zeroMvV, capacityKg),
    });
  }
  return means.sort((a, b) => a.point - b.point);
}

/** Row by row as the contract writes it, so that the last digit is the one that anybody else gets. */
function meanSpan(loaded: readonly number[], zeroMvV: number, capacityKg: number): number | null {
  if (loaded.length === 0) return null;
  let sum = 0;
  for (let i = 0; i < loaded.length; i += 2) {
    sum += (((loaded[i] as number) - zeroMvV) * capacityKg) / (loaded[i + 1] as number);
  }
  return sum / (loaded.length / 2);
}

/**
 * Points by distinct temperature, rising: a temperature counts when it is at least 5 K above the last one counted;
 * points in between belong to that last one.
 */
export function groupByTemperature<P extends { chamberC: number }>(points: readonly P[]): P[][] {
  const groups: P[][] = [];
  let counted = 0;
  for (const point of [...points].sort((a, b) => a.chamberC - b.chamberC)) {
    const group = groups.at(-1);
    if (group && point.chamberC - counted < DISTINCT_K - ROUNDING_K) group.push(point);
    else {
      groups.push([point]);
      counted = point.chamberC;
    }
  }
  return groups;
}
