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

/**
 * The span error of largest magnitude over loaded points, with the share of the envelope it uses.
 * @returns undefined without a point to judge.
 */
export function findWorstSpanError(
  points: readonly PlacedPoint[],
  coefficients: Coefficients,
  family: FamilyRules,
): { spanErrorPpm: number; spanRatio: number } | undefined {
  let worst: number | undefined;
  for (const { point, d } of points) {
    if (point.spanMvV === null) continue;
    const error = spanErrorAt(coefficients, point.spanMvV, d, family.nominalMvV);
    if (worst === undefined || Math.abs(error) > Math.abs(worst)) worst = error;
  }
  return worst === undefined ? undefined : { spanErrorPpm: worst * 1e6, spanRatio: spanRatio(worst, family) };
}

/**
 * Largest share of the limit at minimum load that the corrected unloaded output uses between neighbouring distinct
 * temperatures. Points within 5 K are one: their outputs and their temperatures are averaged.
 * @returns undefined below two distinct temperatures.
 */
export function findZeroShiftRatio(
  points: readonly PlacedPoint[],
  coefficients: Coefficients,
  family: FamilyRules,
): number | undefined {
  const outputs = points.map(({ point, d }) => ({
    chamberC: point.chamberC,
    y0: (point.zeroMvV - zeroAt(coefficients, d)) * gainAt(coefficients, d),
  }));
  let worst: number | undefined;
  let last: { chamberC: number; y0: number } | undefined;
  for (const group of groupByTemperature(outputs)) {
    let chamberC = 0;
    let y0 = 0;
    for (const output of group) {
      chamberC += output.chamberC / group.length;
      y0 += output.y0 / group.length;
    }
    if (last) worst = Math.max(worst ?? 0, zeroShiftRatio(y0 - last.y0, chamberC - last.chamberC, family));
    last = { chamberC, y0 };
  }
  return worst;
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
