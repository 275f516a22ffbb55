import { findLine, findQuadratic } from "./fit";
import { findZero, type Order } from "./individual";
import { distanceK } from "./predict";
import type { Coefficients, DevicePoint, FamilyRules } from "./types";

/** Covariance matrices of fitted coefficients, row by row; null without a degree of freedom. */
export interface DeviceCovariance {
  /** Of zero, zeroTc (, zeroTc2), in products of their units. */
  zero: number[][] | null;
  /** Of gain, gainTc (, gainTc2) of the device's own trim; null too where it has none. */
  gain: number[][] | null;
}

/** Of b0, b1/b0 (, b2/b0) from that of b: J·V·Jᵀ, of first order, J the derivatives of the ratios. */
function ofRatios(coefficients: readonly number[], covariance: readonly (readonly number[])[]): number[][] {
  const b0 = coefficients[0] as number;
  const jacobian = coefficients.map((b, i) =>
    coefficients.map((_, j) => (i === 0 ? (j === 0 ? 1 : 0) : j === 0 ? -b / (b0 * b0) : i === j ? 1 / b0 : 0)),
  );
  const product = (a: readonly number[], b: readonly number[]) =>
    a.reduce(
      (sum, left, i) => sum + b.reduce((part, right, j) => part + left * right * (covariance[i]?.[j] ?? 0), 0),
      0,
    );
  return jacobian.map((row) => jacobian.map((column) => product(row, column)));
}

/**
 * How the errors of a device's fitted values hang together, found anew from its points: they must not be added as if
 * they were independent.
 * @param points as kept with the device: those of its home run first.
 */
export function deviceCovariance(
  points: readonly DevicePoint[],
  coefficients: Coefficients,
  order: Order,
  { referenceC, nominalMvV }: Pick<FamilyRules, "referenceC" | "nominalMvV">,
): DeviceCovariance {
  const home = points.filter((point) => point.purpose === points[0]?.purpose);
  const d = (list: readonly DevicePoint[]) =>
    list.map((point) => distanceK(coefficients, point.deviceTemp, referenceC));
  const loaded = home.filter((point) => point.spanMvV !== null && point.spanMvV > 0);
  const needed = loaded.map((point) => nominalMvV / (point.spanMvV as number));
  const gain = order === 1 ? findLine(d(loaded), needed) : findQuadratic(d(loaded), needed);
  return {
    zero: findZero(order, d(home), home)?.covariance ?? null,
    gain: gain?.covariance ? ofRatios(gain.coefficients, gain.covariance) : null,
  };
}
