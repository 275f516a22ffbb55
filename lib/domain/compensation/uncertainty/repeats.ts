import { rowsByDevice } from "../reading-groups";
import type { Purpose, Reading, RunReadings } from "../types";

/** A standard deviation pooled over many small sets of repeats. */
export interface PooledDeviation {
  /** mV/V */
  sd: number;
  degreesOfFreedom: number;
}

/** How one point of one device was read: what the errors of single rows become in its means. */
export interface PointDesign {
  unloadedRows: number;
  loadedRows: number;
  /** Mean of capacity/load over the loaded rows: how the zero enters the span. */
  perZero: number;
  /** Σ (capacity/load)² / rows²: how the variance of a loaded row enters that of the span. */
  perLoadedVariance: number;
  position: string | null;
  runId: string;
}

/** How a point of a device was read in the run of a purpose; undefined where it was not. */
export type FindDesign = (purpose: Purpose, serial: string, point: number) => PointDesign | undefined;

export interface RepeatSurvey {
  /** Null where no unloaded reading was repeated. */
  unloaded: PooledDeviation | null;
  /** Null where no reading under one load was repeated. */
  loaded: PooledDeviation | null;
  /** Mean load of the loaded rows, kg; null without one. */
  meanLoadKg: number | null;
  designOf: FindDesign;
}

interface SquareSum {
  squares: number;
  freedom: number;
}

function addRepeats(signals: readonly number[], into: SquareSum): void {
  if (signals.length < 2) return;
  const mean = signals.reduce((sum, value) => sum + value, 0) / signals.length;
  for (const value of signals) into.squares += (value - mean) ** 2;
  into.freedom += signals.length - 1;
}

function deviationOf({ squares, freedom }: SquareSum): PooledDeviation | null {
  return freedom > 0 ? { sd: Math.sqrt(squares / freedom), degreesOfFreedom: freedom } : null;
}

function describeRows(rows: readonly Reading[], capacityKg: number, runId: string): PointDesign {
  const scales = rows.filter((row) => row.loadKg > 0).map((row) => capacityKg / row.loadKg);
  const count = scales.length;
  return {
    unloadedRows: rows.length - count,
    loadedRows: count,
    perZero: count > 0 ? scales.reduce((sum, scale) => sum + scale, 0) / count : 0,
    perLoadedVariance: count > 0 ? scales.reduce((sum, scale) => sum + scale * scale, 0) / (count * count) : 0,
    position: rows.find((row) => row.position)?.position ?? null,
    runId,
  };
}

/** The signals of a point by load. */
function byLoad(rows: readonly Reading[]): Map<number, number[]> {
  const loads = new Map<number, number[]>();
  for (const { loadKg, signalMvV } of rows) {
    const signals = loads.get(loadKg);
    if (signals) signals.push(signalMvV);
    else loads.set(loadKg, [signalMvV]);
  }
  return loads;
}

function meanLoad(runs: readonly RunReadings[]): number | null {
  let kg = 0;
  let rows = 0;
  for (const { readings } of runs)
    for (const { loadKg } of readings)
      if (loadKg > 0) {
        kg += loadKg;
        rows++;
      }
  return rows > 0 ? kg / rows : null;
}

/**
 * What the repeats of all runs show, and how each point was read. Repeats are rows of one serial, point and load; their
 * deviations are pooled over all devices, each set about its own mean: s² = Σ squares / Σ (rows − 1).
 * Source: the pooled estimate of variance of JCGM 100:2008, H.3.6 (clause from memory).
 */
export function surveyRepeats(runs: readonly RunReadings[], capacityKg: number): RepeatSurvey {
  const unloaded: SquareSum = { squares: 0, freedom: 0 };
  const loaded: SquareSum = { squares: 0, freedom: 0 };
  for (const run of runs)
    for (const points of rowsByDevice(run.readings).values())
      for (const rows of points.values())
        if (rows.length > 1)
          for (const [load, signals] of byLoad(rows)) addRepeats(signals, load === 0 ? unloaded : loaded);
  const designOf: FindDesign = (purpose, serial, point) => {
    for (const run of runs) {
      const rows = run.purpose === purpose && rowsByDevice(run.readings).get(serial)?.get(point);
      if (rows) return describeRows(rows, capacityKg, run.id);
    }
    return undefined;
  };
  return { unloaded: deviationOf(unloaded), loaded: deviationOf(loaded), meanLoadKg: meanLoad(runs), designOf };
}
