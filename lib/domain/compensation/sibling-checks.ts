import { finish, forEachInSteps, mapInSteps, type Steps } from "@/lib/domain/steps";
import { makeFinding } from "./findings";
import { findOutliers, medianOf, type Outlier, type OutlierLevels } from "./outliers";
import type { Coefficients, DeviceResult, FamilyRules, Finding } from "./types";

/** What of a device is compared with others; `findings` takes what is found. */
export type Sibling = Pick<
  DeviceResult,
  "serial" | "coefficients" | "individual" | "gainFrom" | "measuredRangeC" | "findings"
>;

/** Devices in a lot's coefficients and the effect of a difference on the output, v at capacity at the range's end. */
interface Compared {
  coefficient: "zero" | "zeroTc" | "gain" | "gainTc";
  devices: Sibling[];
  values: number[];
  intervalsPer: number;
  levels: OutlierLevels;
}

/** One lot in a hundred clean ones has an outlier, over the five values compared. */
const LEVELS: OutlierLevels = { robust: 0.01 / 5, grubbs: 0.01 / 5 };
/** A sample's gainTc stands for the whole lot: Grubbs' test at the usual 5 %, two-sided. */
const SAMPLE_LEVELS: OutlierLevels = { ...LEVELS, grubbs: 0.05 };
/** A difference of less than this in the output is none to look at, v. */
const SLIGHT_V = 0.1;
/** More devices than this in one coefficient are a lot of two kinds, and one finding. */
const SINGLE_MAX = 20;

/** A difference between devices that a person has to judge, gathered where there are many. */
function outlierFindings({ coefficient, devices, values, intervalsPer, levels }: Compared): Finding[] {
  const { median, outliers } = findOutliers(values, levels);
  const intervals = ({ index }: Outlier) => Math.abs((values[index] as number) - median) * intervalsPer;
  const weighty = outliers.filter((one) => intervals(one) >= SLIGHT_V);
  if (weighty.length > SINGLE_MAX) {
    const worst = weighty.reduce((a, b) => (intervals(b) > intervals(a) ? b : a));
    const data = {
      coefficient,
      median,
      value: values[worst.index],
      worst: devices[worst.index]?.serial,
      devices: weighty.length,
      serials: weighty.slice(0, SINGLE_MAX).map(({ index }) => devices[index]?.serial),
    };
    return [makeFinding("coefficient.many_outliers", { data })];
  }
  for (const outlier of weighty) {
    const { index, score, threshold, g, critical, caveat } = outlier;
    const device = devices[index] as Sibling;
    const data = {
      coefficient,
      value: values[index],
      median,
      intervals: intervals(outlier),
      ...(score !== null && { score, threshold }),
      ...(g !== null && { g, critical, caveat }),
    };
    device.findings.push(makeFinding("coefficient.outlier", { serial: device.serial, data }));
  }
  return [];
}

/** Largest distance from the reference that the devices were measured at, K. */
function reachOf(devices: readonly Sibling[], referenceC: number): number {
  return devices.reduce(
    (reach, { measuredRangeC: [low, high] }) =>
      Math.max(reach, Math.abs(low - referenceC), Math.abs(high - referenceC)),
    0,
  );
}

/** Share of the others that have to agree in sign before one that doesn't is told, and how many there have to be. */
const ALIKE = 0.9;
const ALIKE_MIN = 4;

/**
 * gainTc of the other sign than the lot's: the material gives it, so that within a lot it hardly changes. zeroTc comes
 * from small differences within the bridge and has either sign in any lot; it is not compared.
 */
function* signFindings({ devices, values, intervalsPer }: Compared): Steps<void> {
  const positive = values.filter((value) => value > 0).length;
  const negative = values.filter((value) => value < 0).length;
  const [alike, sign] = positive > negative ? [positive, 1] : [negative, -1];
  yield;
  const median = medianOf(values.length > 0 ? values : [0]);
  const others = values.length - 1;
  if (alike < ALIKE_MIN || alike < ALIKE * others) return;
  yield* forEachInSteps(values.entries(), ([i, gainTc]) => {
    if (Math.sign(gainTc) !== -sign || Math.abs(gainTc) * intervalsPer < SLIGHT_V) return;
    const { serial, findings } = devices[i] as Sibling;
    findings.push(makeFinding("coefficient.sign_unlike", { serial, data: { gainTc, alike, others, median } }));
  });
}

/** Reading of a device's thermometer at a temperature, in its own unit. */
function readingAt({ tempOffset, tempSlope }: Coefficients, temperatureC: number): number {
  return (temperatureC - tempOffset) / tempSlope;
}

/** What of the thermometers is compared, in their own unit, and how a finding says where. */
interface ThermometerMeasure {
  readings: number[];
  where: { atC: number; fromC?: number };
}

/** Readings at the ends of the measured range, and by how much they rise between these. */
function* thermometerMeasures(devices: readonly Sibling[]): Steps<ThermometerMeasure[]> {
  const low = medianOf(devices.map((device) => device.measuredRangeC[0]));
  const high = medianOf(devices.map((device) => device.measuredRangeC[1]));
  const readings = (atC: number) =>
    mapInSteps(devices, (device) => readingAt(device.coefficients as Coefficients, atC));
  const atLow = yield* readings(low);
  const atHigh = yield* readings(high);
  return [
    { readings: atLow, where: { atC: low } },
    { readings: atHigh, where: { atC: high } },
    { readings: atHigh.map((value, i) => value - (atLow[i] as number)), where: { atC: high, fromC: low } },
  ];
}

/**
 * A thermometer that reads otherwise than its siblings: the calibration takes it up, but it is rarer than a slipped row
 * or a board on another cell, and then the output would be off by what is told.
 */
function* checkThermometers(devices: readonly Sibling[], { intervals, nominalMvV }: FamilyRules): Steps<void> {
  const perCount = medianOf(devices.map((device) => (device.coefficients as Coefficients).tempSlope));
  const found = new Map<Sibling, { away: number; data: Record<string, unknown> }>();
  for (const { readings, where } of yield* thermometerMeasures(devices)) {
    yield;
    const { median, outliers } = findOutliers(readings, LEVELS);
    for (const { index, score, threshold, g, critical } of outliers) {
      const device = devices[index] as Sibling;
      const awayK = ((readings[index] as number) - median) * perCount;
      const { gainTc, zeroTc } = device.coefficients as Coefficients;
      const effect = Math.abs(awayK) * (Math.abs(gainTc) + Math.abs(zeroTc) / nominalMvV) * intervals;
      if (effect < SLIGHT_V || Math.abs(awayK) <= (found.get(device)?.away ?? 0)) continue;
      const tests = score === null ? { score: g, threshold: critical } : { score, threshold };
      found.set(device, { away: Math.abs(awayK), data: { ...where, awayK, ...tests, intervals: effect } });
    }
  }
  for (const [device, { data }] of found)
    device.findings.push(makeFinding("thermometer.off_siblings", { serial: device.serial, data }));
}

/**
 * Compares the devices of a lot with each other: outliers in zero, zeroTc, gain and gainTc, gainTc of the other sign,
 * thermometers off their siblings. Findings of devices are put on them; those of the lot are returned.
 * @param devices that are not excluded. @param trimmed those whose own gainTc is compared: the sample, or all of an
 * individual derivation. @param pooled whether that gainTc stands for the lot.
 */
export function checkSiblings(
  devices: readonly Sibling[],
  trimmed: readonly Sibling[],
  pooled: boolean,
  family: FamilyRules,
): Finding[] {
  return finish(checkSiblingsInSteps(devices, trimmed, pooled, family));
}

/** {@link checkSiblings} for a process that serves others meanwhile. */
export function* checkSiblingsInSteps(
  devices: readonly Sibling[],
  trimmed: readonly Sibling[],
  pooled: boolean,
  family: FamilyRules,
): Steps<Finding[]> {
  const { intervals, nominalMvV, referenceC } = family;
  const valued = devices.filter((device) => device.coefficients !== null);
  const own = valued.filter((device) => device.gainFrom !== "sample-mean");
  const reach = reachOf(devices, referenceC);
  const perMvV = intervals / nominalMvV;
  yield;
  const gainTc: Compared = {
    coefficient: "gainTc",
    devices: [...trimmed],
    values: yield* mapInSteps(trimmed, (device) => device.individual?.gainTc ?? 0),
    intervalsPer: reach * intervals,
    levels: pooled ? SAMPLE_LEVELS : LEVELS,
  };
  yield* signFindings(gainTc);
  if (valued.length > 0) yield* checkThermometers(valued, family);
  return [
    ...(yield* valueFindings(valued, "zero", perMvV)),
    ...(yield* valueFindings(valued, "zeroTc", perMvV * reach)),
    ...(yield* valueFindings(own, "gain", intervals)),
    ...outlierFindings(gainTc),
  ];
}

function* valueFindings(
  devices: Sibling[],
  coefficient: "zero" | "zeroTc" | "gain",
  intervalsPer: number,
): Steps<Finding[]> {
  const values = yield* mapInSteps(devices, (device) => (device.coefficients as Coefficients)[coefficient]);
  yield;
  const found = outlierFindings({ coefficient, devices, values, intervalsPer, levels: LEVELS });
  yield;
  return found;
}
