import type { Coefficients, DevicePoint, FamilyRules, GainCoefficients } from "./types";

/** d: the device's temperature by its own thermometer, less the reference, K. */
export function distanceK(
  thermometer: Pick<Coefficients, "tempOffset" | "tempSlope">,
  deviceTemp: number,
  referenceC: number,
): number {
  return thermometer.tempOffset + thermometer.tempSlope * deviceTemp - referenceC;
}

/** zero(d), mV/V. */
export function zeroAt({ zero, zeroTc, zeroTc2 = 0 }: Coefficients, d: number): number {
  return zero + (zeroTc + zeroTc2 * d) * d;
}

/** gain(d) / gain. */
export function gainShape({ gainTc, gainTc2 = 0 }: Pick<GainCoefficients, "gainTc" | "gainTc2">, d: number): number {
  return 1 + (gainTc + gainTc2 * d) * d;
}

/** gain(d), no unit. */
export function gainAt(coefficients: GainCoefficients, d: number): number {
  return coefficients.gain * gainShape(coefficients, d);
}

/**
 * Compensated output y = (s − zero(d))·gain(d), mV/V, so that y/N is load/capacity.
 * @param signalMvV uncompensated output. @param deviceTemp in the device's own unit.
 */
export function correctedOutput(
  coefficients: Coefficients,
  signalMvV: number,
  deviceTemp: number,
  referenceC: number,
): number {
  const d = distanceK(coefficients, deviceTemp, referenceC);
  return (signalMvV - zeroAt(coefficients, d)) * gainAt(coefficients, d);
}

/** Relative span error e = S·gain(d)/N − 1 of a span signal S scaled to capacity, mV/V. */
export function spanErrorAt(coefficients: GainCoefficients, spanMvV: number, d: number, nominalMvV: number): number {
  return (spanMvV * gainAt(coefficients, d)) / nominalMvV - 1;
}

/** One value over chamber temperature. */
export interface DriftValue {
  chamberC: number;
  value: number;
}

/** A drift as measured, uncorrected and corrected. */
export interface DriftCurve {
  before: DriftValue[];
  after: DriftValue[];
}

/** Drift of a device by rising chamber temperature. */
export interface DriftCurves {
  /** Unloaded output in verification intervals: before, against the point nearest the reference. */
  zeroIntervals: DriftCurve;
  /** Relative span error, ppm: before, against the loaded point nearest the reference. */
  spanPpm: DriftCurve;
}

function nearest<P extends { chamberC: number }>(points: readonly P[], referenceC: number): P | undefined {
  let best: P | undefined;
  for (const point of points)
    if (!best || Math.abs(point.chamberC - referenceC) < Math.abs(best.chamberC - referenceC)) best = point;
  return best;
}

/**
 * What the readings of a device show before and after compensation. "Before" starts at the point nearest the
 * reference, since an untrimmed device has no other origin; "after" is against the ideal output. Empty without points.
 */
export function driftCurves(
  points: readonly DevicePoint[],
  coefficients: Coefficients,
  family: Pick<FamilyRules, "referenceC" | "nominalMvV" | "intervals">,
): DriftCurves {
  const { referenceC, nominalMvV, intervals } = family;
  const rising = [...points].sort((a, b) => a.chamberC - b.chamberC || a.point - b.point);
  const loaded = rising.filter((point): point is DevicePoint & { spanMvV: number } => point.spanMvV !== null);
  const zeroOrigin = nearest(rising, referenceC)?.zeroMvV ?? 0;
  const spanOrigin = nearest(loaded, referenceC)?.spanMvV ?? 1;
  const perInterval = intervals / nominalMvV;
  const curve = <P extends DevicePoint>(of: P[], value: (point: P) => number): DriftValue[] =>
    of.map((point) => ({ chamberC: point.chamberC, value: value(point) }));
  const d = (point: DevicePoint) => distanceK(coefficients, point.deviceTemp, referenceC);
  return {
    zeroIntervals: {
      before: curve(rising, (point) => (point.zeroMvV - zeroOrigin) * perInterval),
      after: curve(
        rising,
        (point) => correctedOutput(coefficients, point.zeroMvV, point.deviceTemp, referenceC) * perInterval,
      ),
    },
    spanPpm: {
      before: curve(loaded, (point) => (spanOrigin === 0 ? 0 : (point.spanMvV / spanOrigin - 1) * 1e6)),
      after: curve(loaded, (point) => spanErrorAt(coefficients, point.spanMvV, d(point), nominalMvV) * 1e6),
    },
  };
}
