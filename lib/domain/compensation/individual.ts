import { type Fit, findLine, findQuadratic } from "./fit";
import type { DevicePoint, GainCoefficients } from "./types";

export type Order = 1 | 2;

/** Distinct temperatures that an order needs. */
export function temperaturesNeeded(order: Order): number {
  return order + 1;
}

function findCurve(order: Order, x: readonly number[], y: readonly number[]): Fit | undefined {
  return order === 1 ? findLine(x, y) : findQuadratic(x, y);
}

/** Device thermometer: least squares of the chamber temperature on the device's own, °C = offset + slope·u. */
export function findThermometer(points: readonly DevicePoint[]): Fit | undefined {
  const fit = findLine(
    points.map((point) => point.deviceTemp),
    points.map((point) => point.chamberC),
  );
  return fit && fit.coefficients[1] !== 0 ? fit : undefined;
}

/** Zero: least squares of the unloaded signal, mV/V, on d, K. */
export function findZero(order: Order, d: readonly number[], points: readonly DevicePoint[]): Fit | undefined {
  return findCurve(
    order,
    d,
    points.map((point) => point.zeroMvV),
  );
}

/** An individual gain trim with what is known of its certainty. */
export interface GainTrim {
  coefficients: GainCoefficients;
  gainStandardError: number | null;
  gainTcStandardError: number | null;
  /** Null in order 1. */
  gainTc2StandardError: number | null;
  residualSd: number | null;
  degreesOfFreedom: number;
}

/**
 * Standard error of the ratio b_i/b0 of two coefficients, of first order in the errors of both, with their covariance.
 * @param ratio b_i/b0.
 */
function ratioError(covariance: readonly (readonly number[])[], i: 1 | 2, ratio: number, b0: number): number {
  const [v0, v0i, vi] = [covariance[0]?.[0], covariance[0]?.[i], covariance[i]?.[i]] as [number, number, number];
  return Math.sqrt(Math.max(0, vi - 2 * ratio * v0i + ratio * ratio * v0)) / b0;
}

/**
 * Individual trim: least squares of the needed gain N/S on d, written as gain·(1 + gainTc·d (+ gainTc2·d²)).
 * @param d K, as many as span signals. @param spansMvV span signals S > 0 scaled to capacity.
 * @returns undefined where the points do not fix the curve or gain would not be positive.
 */
export function findGainTrim(
  order: Order,
  d: readonly number[],
  spansMvV: readonly number[],
  nominalMvV: number,
): GainTrim | undefined {
  const fit = findCurve(
    order,
    d,
    spansMvV.map((span) => nominalMvV / span),
  );
  if (!fit) return undefined;
  const [gain, linear, square] = fit.coefficients as [number, number, number | undefined];
  if (!(gain > 0)) return undefined;
  const gainTc = linear / gain;
  const coefficients: GainCoefficients = { gain, gainTc };
  if (square !== undefined) coefficients.gainTc2 = square / gain;
  if (!Object.values(coefficients).every(Number.isFinite)) return undefined;
  const { residualSd, degreesOfFreedom, covariance, standardErrors } = fit;
  const { gainTc2 } = coefficients;
  return {
    coefficients,
    gainStandardError: standardErrors?.[0] ?? null,
    gainTcStandardError: covariance ? ratioError(covariance, 1, gainTc, gain) : null,
    gainTc2StandardError: covariance && gainTc2 !== undefined ? ratioError(covariance, 2, gainTc2, gain) : null,
    residualSd,
    degreesOfFreedom,
  };
}
