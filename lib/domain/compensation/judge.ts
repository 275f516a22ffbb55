import { spanRatio, zeroShiftRatio } from "./envelope";
import { groupByTemperature } from "./points";
import { gainAt, spanErrorAt, zeroAt } from "./predict";
import type { Coefficients, DevicePoint, FamilyRules, VerificationResult } from "./types";

/** A point with its distance from the reference by the device's own thermometer. */
export interface PlacedPoint {
  point: DevicePoint;
  /** K */
  d: number;
}

/** Where a device is furthest from its ideal output at capacity. */
export interface WorstSpanError {
  chamberC: number;
  /** Signed. */
  spanErrorPpm: number;
  /** Share of the error envelope it uses. */
  spanRatio: number;
}

/**
 * The span error of largest magnitude over loaded points, with the share of the envelope it uses.
 * @returns undefined without a point to judge.
 */
export function findWorstSpanError(
  points: readonly PlacedPoint[],
  coefficients: Coefficients,
  family: FamilyRules,
): WorstSpanError | undefined {
  let worst: { chamberC: number; error: number } | undefined;
  for (const { point, d } of points) {
    if (point.spanMvV === null) continue;
    const error = spanErrorAt(coefficients, point.spanMvV, d, family.nominalMvV);
    if (worst === undefined || Math.abs(error) > Math.abs(worst.error)) worst = { chamberC: point.chamberC, error };
  }
  if (!worst) return undefined;
  const { chamberC, error } = worst;
  return { chamberC, spanErrorPpm: error * 1e6, spanRatio: spanRatio(error, family) };
}

/** Between which neighbouring temperatures a device's corrected unloaded output moves most. */
export interface WorstZeroShift {
  /** The lower temperature, °C; `toC` the higher one. */
  fromC: number;
  toC: number;
  /** Change of the corrected unloaded output from the lower to the higher temperature, mV/V. */
  shiftMvV: number;
  /** Share of the limit at minimum load. */
  ratio: number;
}

/**
 * The change of the corrected unloaded output that uses most of the limit at minimum load, between neighbouring
 * distinct temperatures. Points within 5 K are one: their outputs and their temperatures are averaged.
 * @returns undefined below two distinct temperatures.
 */
export function findWorstZeroShift(
  points: readonly PlacedPoint[],
  coefficients: Coefficients,
  family: FamilyRules,
): WorstZeroShift | undefined {
  const outputs = points.map(({ point, d }) => ({
    chamberC: point.chamberC,
    y0: (point.zeroMvV - zeroAt(coefficients, d)) * gainAt(coefficients, d),
  }));
  let worst: WorstZeroShift | undefined;
  let last: { chamberC: number; y0: number } | undefined;
  for (const group of groupByTemperature(outputs)) {
    let chamberC = 0;
    let y0 = 0;
    for (const output of group) {
      chamberC += output.chamberC / group.length;
      y0 += output.y0 / group.length;
    }
    if (last) {
      const shiftMvV = y0 - last.y0;
      const ratio = zeroShiftRatio(shiftMvV, chamberC - last.chamberC, family);
      if (!worst || ratio > worst.ratio) worst = { fromC: last.chamberC, toC: chamberC, shiftMvV, ratio };
    }
    last = { chamberC, y0 };
  }
  return worst;
}

/** The share alone of {@link findWorstZeroShift}. */
export function findZeroShiftRatio(
  points: readonly PlacedPoint[],
  coefficients: Coefficients,
  family: FamilyRules,
): number | undefined {
  return findWorstZeroShift(points, coefficients, family)?.ratio;
}

/** A verification device passes when every ratio that could be judged is at most 1. */
export function verdictOf(ratios: {
  serial: string;
  spanErrorPpm: number | null;
  spanRatio: number | null;
  zeroShiftRatio: number | null;
}): VerificationResult {
  const { serial, spanErrorPpm, spanRatio: span, zeroShiftRatio: zero } = ratios;
  const judged: string[] = [];
  if (span !== null) judged.push("spanRatio");
  if (zero !== null) judged.push("zeroShiftRatio");
  const passed = judged.length === 0 ? null : (span ?? 0) <= 1 && (zero ?? 0) <= 1;
  return { serial, spanErrorPpm, spanRatio: span, zeroShiftRatio: zero, passed, judged };
}
