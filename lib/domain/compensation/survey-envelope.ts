import { findTrimPoint } from "./device-gain";
import { type StepEnd, spanErrorAtStepEnds } from "./envelope";
import { findWorstSpanError, findWorstZeroShift, type PlacedPoint } from "./judge";
import { distanceK } from "./predict";
import type { Coefficients, DeviceResult, FamilyRules } from "./types";

/** The largest span error of a lot, with where it was found. */
export interface SpanExtreme {
  serial: string;
  chamberC: number;
  /** Signed, relative to the nominal output. */
  errorPpm: number;
  /** Share of the error envelope it uses; ≤ 1 is inside. */
  ratio: number;
  /** The same error in intervals at every load where the envelope is tightest. */
  stepEnds: StepEnd[];
  /** Whether the temperature lies in the derivation's proven range. */
  proven: boolean;
}

/** The change of the unloaded output that uses most of the limit at minimum load, with where it was found. */
export interface ZeroExtreme {
  serial: string;
  /** Neighbouring distinct temperatures of the device, the lower one first. */
  fromC: number;
  toC: number;
  /** Signed change from the lower to the higher temperature, in verification intervals v. */
  shiftIntervals: number;
  /** Share of p_LC·v_min per 5 K (2 K in class A); ≤ 1 is inside. */
  ratio: number;
  proven: boolean;
}

export interface EnvelopeSide {
  /** Null where no device could be judged. */
  span: SpanExtreme | null;
  zero: ZeroExtreme | null;
  /** How many devices were judged. */
  spanDevices: number;
  zeroDevices: number;
}

export interface EnvelopeSurvey {
  before: EnvelopeSide;
  after: EnvelopeSide;
  /** Parts of the family's temperature range for which nothing is proven, °C, rising; empty where all of it is. */
  notProvenC: [number, number][];
}

function emptySide(): EnvelopeSide {
  return { span: null, zero: null, spanDevices: 0, zeroDevices: 0 };
}

/** The parts of the family's range that the proven range leaves out. */
function notProven(range: readonly [number, number] | null, family: FamilyRules): [number, number][] {
  const { temperatureMinC: from, temperatureMaxC: to } = family;
  if (!range || range[1] <= from || range[0] >= to) return [[from, to]];
  const parts: [number, number][] = [];
  if (range[0] > from) parts.push([from, range[0]]);
  if (range[1] < to) parts.push([range[1], to]);
  return parts;
}

/** The same device with constant zero and constant gain: see {@link surveyEnvelope}. */
function referenceTrim(
  coefficients: Coefficients,
  home: readonly PlacedPoint[],
  loaded: readonly PlacedPoint[],
  family: FamilyRules,
): Coefficients {
  const { tempOffset, tempSlope, zero, gain } = coefficients;
  const taken = findTrimPoint(loaded, family.referenceC)?.point.spanMvV;
  let nearest: PlacedPoint | undefined;
  for (const place of home) if (!nearest || Math.abs(place.d) < Math.abs(nearest.d)) nearest = place;
  return {
    tempOffset,
    tempSlope,
    zero: nearest?.point.zeroMvV ?? zero,
    zeroTc: 0,
    gain: taken ? family.nominalMvV / taken : gain,
    gainTc: 0,
  };
}

interface Surveyor {
  family: FamilyRules;
  isProven: (chamberC: number) => boolean;
}

function addSpan(
  side: EnvelopeSide,
  serial: string,
  points: readonly PlacedPoint[],
  coefficients: Coefficients,
  { family, isProven }: Surveyor,
): void {
  const worst = findWorstSpanError(points, coefficients, family);
  if (!worst) return;
  side.spanDevices++;
  const { chamberC, spanErrorPpm: errorPpm, spanRatio: ratio } = worst;
  if (side.span && ratio <= side.span.ratio) return;
  const stepEnds = spanErrorAtStepEnds(errorPpm / 1e6, family);
  side.span = { serial, chamberC, errorPpm, ratio, stepEnds, proven: isProven(chamberC) };
}

function addZero(
  side: EnvelopeSide,
  serial: string,
  points: readonly PlacedPoint[],
  coefficients: Coefficients,
  { family, isProven }: Surveyor,
): void {
  const worst = findWorstZeroShift(points, coefficients, family);
  if (!worst) return;
  side.zeroDevices++;
  const { fromC, toC, shiftMvV, ratio } = worst;
  if (side.zero && ratio <= side.zero.ratio) return;
  const shiftIntervals = (shiftMvV / family.nominalMvV) * family.intervals;
  side.zero = { serial, fromC, toC, shiftIntervals, ratio, proven: isProven(fromC) && isProven(toC) };
}

function surveyDevice(device: DeviceResult, survey: EnvelopeSurvey, surveyor: Surveyor): void {
  const { serial, coefficients, role, spanRatio, zeroShiftRatio } = device;
  if (!coefficients) return;
  const { family } = surveyor;
  const home: PlacedPoint[] = [];
  const loaded: PlacedPoint[] = [];
  for (const point of device.points) {
    const place = { point, d: distanceK(coefficients, point.deviceTemp, family.referenceC) };
    if (point.purpose === role) home.push(place);
    if (point.spanMvV !== null) loaded.push(place);
  }
  const before = referenceTrim(coefficients, home, loaded, family);
  if (loaded.length > 1) addSpan(survey.before, serial, loaded, before, surveyor);
  addZero(survey.before, serial, home, before, surveyor);
  // Where the derivation judged nothing the errors are zero by construction, or there is no point to judge by.
  if (spanRatio !== null) addSpan(survey.after, serial, loaded, coefficients, surveyor);
  if (zeroShiftRatio !== null) addZero(survey.after, serial, home, coefficients, surveyor);
}

/**
 * The worst device of a derivation before and after compensation, for span (OIML R 60-1:2021, table 4) and for the
 * output at minimum load (5.6.1.3), each where it was measured. A class is proven by type approval, not here.
 *
 * *Before* is the device as if trimmed at the reference only: a constant gain that makes its trim point (the loaded
 * point its gain is taken from; for an individual trim the one that would be taken) ideal, a constant zero taken at the
 * point of the home run nearest the reference. *After* has the derivation's coefficients; a device counts there only
 * where the derivation could judge it, that is with a point to spare, and `spanDevices` and `zeroDevices` say how many.
 * Devices without coefficients are left out. Only measured temperatures are judged, nothing is extrapolated.
 * @param devices of one derivation. @param provenRange the derivation's, °C, null where nothing is proven.
 * @throws AppError nothing for results of `derive`; `family` has to have passed its check.
 */
export function surveyEnvelope(
  devices: readonly DeviceResult[],
  family: FamilyRules,
  provenRange: readonly [number, number] | null,
): EnvelopeSurvey {
  const isProven = (chamberC: number) =>
    provenRange !== null && chamberC >= provenRange[0] && chamberC <= provenRange[1];
  const survey = { before: emptySide(), after: emptySide(), notProvenC: notProven(provenRange, family) };
  for (const device of devices) surveyDevice(device, survey, { family, isProven });
  return survey;
}
