import { makeFinding } from "./findings";
import type { Fit } from "./fit";
import { findGainTrim, findThermometer, findZero, type GainTrim, type Order, temperaturesNeeded } from "./individual";
import type { PlacedPoint } from "./judge";
import { groupByTemperature } from "./points";
import { distanceK } from "./predict";
import { type DeviceRecord, HOME_PURPOSES } from "./run-selection";
import type { DevicePoint, DeviceResult, FamilyRules, Role } from "./types";

/** A device as far as its own readings go, before the lot's gain. */
export interface FittedDevice {
  result: DeviceResult;
  /** Thermometer and zero; undefined where a hard finding says why. */
  thermometer?: Fit;
  zero?: Fit;
  trim?: GainTrim;
  /** Points of the home run, placed by the thermometer. */
  home: PlacedPoint[];
  /** Loaded points of all runs, placed by the thermometer. */
  loaded: PlacedPoint[];
}

function emptyResult(record: DeviceRecord, role: Role, home: readonly DevicePoint[]): DeviceResult {
  const { sample = [], zero = [], verification = [], span = [] } = record.points;
  const others = [sample, zero, span, verification].filter((points) => points !== home).flat();
  const points = [...home, ...others];
  let low = Number.POSITIVE_INFINITY;
  let high = Number.NEGATIVE_INFINITY;
  for (const { chamberC } of home.length > 0 ? home : points) {
    low = Math.min(low, chamberC);
    high = Math.max(high, chamberC);
  }
  return {
    serial: record.serial,
    role,
    coefficients: null,
    individual: null,
    residuals: { temperature: [], zero: [], gain: null },
    uncertainty: {
      zero: null,
      zeroTc: null,
      gain: null,
      gainTc: null,
      residualSdTemperature: null,
      residualSdZero: null,
      residualSdGain: null,
      degreesOfFreedomTemperature: 0,
      degreesOfFreedomZero: 0,
      degreesOfFreedomGain: 0,
    },
    points,
    loadedAtC: points.filter((point) => point.spanMvV !== null).map((point) => point.chamberC),
    gainFrom: null,
    spanErrorPpm: null,
    spanRatio: null,
    zeroShiftRatio: null,
    measuredRangeC: [low, high],
    findings: [],
  };
}

/** Thermometer and zero over the home run, or the finding that says why not. */
function fitHome(device: FittedDevice, points: readonly DevicePoint[], family: FamilyRules, order: Order): void {
  const { result } = device;
  const { serial } = result;
  const needed = temperaturesNeeded(order);
  const distinct = groupByTemperature(points).length;
  if (distinct < needed) {
    result.findings.push(makeFinding("temperatures.too_few", { serial, data: { order, needed, distinct } }));
    return;
  }
  const thermometer = findThermometer(points);
  if (!thermometer) {
    result.findings.push(makeFinding("thermometer.no_slope", { serial }));
    return;
  }
  const [tempOffset, tempSlope] = thermometer.coefficients as [number, number];
  const place = (point: DevicePoint) => ({
    point,
    d: distanceK({ tempOffset, tempSlope }, point.deviceTemp, family.referenceC),
  });
  device.home = points.map(place);
  const zero = findZero(
    order,
    device.home.map(({ d }) => d),
    points,
  );
  if (!zero) {
    result.findings.push(makeFinding("result.not_finite", { serial }));
    return;
  }
  device.thermometer = thermometer;
  device.zero = zero;
  device.loaded = result.points.filter((point) => point.spanMvV !== null).map(place);
  result.residuals.temperature = thermometer.residuals;
  result.residuals.zero = zero.residuals;
  result.uncertainty.zero = zero.standardErrors?.[0] ?? null;
  result.uncertainty.zeroTc = zero.standardErrors?.[1] ?? null;
  result.uncertainty.residualSdTemperature = thermometer.residualSd;
  result.uncertainty.degreesOfFreedomTemperature = thermometer.degreesOfFreedom;
  result.uncertainty.residualSdZero = zero.residualSd;
  result.uncertainty.degreesOfFreedomZero = zero.degreesOfFreedom;
}

/** The device's own gain over the loaded points of its home run, where they fix one. */
function fitOwnGain(device: FittedDevice, family: FamilyRules, order: Order): void {
  const own = device.home.filter(({ point }) => point.spanMvV !== null);
  if (groupByTemperature(own.map(({ point }) => point)).length < temperaturesNeeded(order)) return;
  device.trim = findGainTrim(
    order,
    own.map(({ d }) => d),
    own.map(({ point }) => point.spanMvV as number),
    family.nominalMvV,
  );
  device.result.individual = device.trim?.coefficients ?? null;
}

/**
 * What a device's own readings fix: thermometer and zero over its home run (sample, else zero, else verification) and
 * its individual trim. Where something can't be fitted a hard finding says so and the rest of the lot goes on.
 */
export function fitDevice(record: DeviceRecord, family: FamilyRules, order: Order): FittedDevice {
  const { serial, points } = record;
  const homePurpose = HOME_PURPOSES.find((purpose) => points[purpose]);
  const home = (homePurpose && points[homePurpose]) ?? [];
  // A device with a span run alone belongs to those trimmed with a zero run, which it lacks.
  const device: FittedDevice = { result: emptyResult(record, homePurpose ?? "zero", home), home: [], loaded: [] };
  const { findings } = device.result;
  if (record.boardChanged) findings.push(makeFinding("device.board_changed", { serial }));
  const falling = device.result.points.find((point) => point.spanMvV !== null && !(point.spanMvV > 0));
  if (falling) {
    const { point } = falling;
    findings.push(makeFinding("signal.not_rising", { serial, point, data: { point } }));
  }
  if (!homePurpose) findings.push(makeFinding("device.span_only", { serial }));
  else fitHome(device, home, family, order);
  if (device.thermometer && !falling) fitOwnGain(device, family, order);
  if (homePurpose === "sample" && points.verification) findings.push(makeFinding("verification.in_sample", { serial }));
  return device;
}

/** Whether a finding forbids coefficients. */
export function isBlocked(result: DeviceResult): boolean {
  return result.findings.some((finding) => finding.severity === "hard");
}
