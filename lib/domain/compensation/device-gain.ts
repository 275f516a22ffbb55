import type { FittedDevice } from "./device-fit";
import { makeFinding } from "./findings";
import { type Order, temperaturesNeeded } from "./individual";
import { findWorstSpanError, findZeroShiftRatio, type PlacedPoint } from "./judge";
import { groupByTemperature } from "./points";
import { gainAt, gainShape } from "./predict";
import type { Coefficients, FamilyRules, GainCoefficients, GainSource, PooledResult } from "./types";

/** Beyond this distance of gain from 1 a wrong load or capacity is likelier than a cell (common practice, no source). */
export const GAIN_FROM_ONE = 0.2;

/** A gain and where it came from. */
interface ChosenGain {
  gain: GainCoefficients;
  from: GainSource;
  /** The loaded points that judge it: all but the one it was taken from. */
  judging: PlacedPoint[];
}

/** The loaded point that trims a device: span run first, nearest the reference, then lower temperature, then point. */
export function findTrimPoint(loaded: readonly PlacedPoint[], referenceC: number): PlacedPoint | undefined {
  const before = (a: PlacedPoint, b: PlacedPoint): boolean => {
    const rank = (place: PlacedPoint) => (place.point.purpose === "span" ? 0 : 1);
    const keys = (place: PlacedPoint) => [
      rank(place),
      Math.abs(place.point.chamberC - referenceC),
      place.point.chamberC,
      place.point.point,
    ];
    const [left, right] = [keys(a), keys(b)];
    const at = left.findIndex((key, i) => key !== right[i]);
    return at >= 0 && (left[at] as number) < (right[at] as number);
  };
  let best: PlacedPoint | undefined;
  for (const place of loaded) if (!best || before(place, best)) best = place;
  return best;
}

function ownGain(device: FittedDevice, order: Order): ChosenGain | undefined {
  const { result, trim, loaded } = device;
  const { serial } = result;
  if (!trim) {
    const own = device.home.filter(({ point }) => point.spanMvV !== null).map(({ point }) => point);
    const distinct = groupByTemperature(own).length;
    const needed = temperaturesNeeded(order);
    if (loaded.length === 0) result.findings.push(makeFinding("gain.not_loaded", { serial }));
    else if (distinct < needed)
      result.findings.push(makeFinding("gain.temperatures_too_few", { serial, data: { order, needed, distinct } }));
    else result.findings.push(makeFinding("result.not_finite", { serial }));
    return undefined;
  }
  result.uncertainty.gain = trim.gainStandardError;
  result.uncertainty.gainTc = trim.gainTcStandardError;
  if (order === 2) result.uncertainty.gainTc2 = trim.gainTc2StandardError;
  result.uncertainty.residualSdGain = trim.residualSd;
  result.uncertainty.degreesOfFreedomGain = trim.degreesOfFreedom;
  // Without a point to spare the errors are zero by construction and say nothing.
  const judging = loaded.length > temperaturesNeeded(order) ? loaded : [];
  return { gain: trim.coefficients, from: "own-points", judging };
}

function pooledGain(device: FittedDevice, pooled: PooledResult, family: FamilyRules, order: Order): ChosenGain {
  const { result, loaded, trim } = device;
  const { serial } = result;
  const { gainTc, gainTc2, meanGain, sd, n, sdGain } = pooled;
  const shape = gainTc2 === undefined ? { gainTc } : { gainTc, gainTc2 };
  result.uncertainty.gainTc = sd === null ? null : sd / Math.sqrt(n);
  if (result.role === "sample" && !trim)
    result.findings.push(makeFinding("sample.trim_missing", { serial, data: { needed: temperaturesNeeded(order) } }));
  const taken = findTrimPoint(loaded, family.referenceC);
  if (!taken) {
    result.findings.push(makeFinding("gain.not_trimmed", { serial, data: { meanGain, sdGain, n } }));
    return { gain: { gain: meanGain, ...shape }, from: "sample-mean", judging: [] };
  }
  const gain = family.nominalMvV / (taken.point.spanMvV as number) / gainShape(shape, taken.d);
  const from = taken.point.purpose === "span" ? "span-run" : "own-points";
  return { gain: { gain, ...shape }, from, judging: loaded.filter((place) => place !== taken) };
}

function judge(device: FittedDevice, coefficients: Coefficients, judging: PlacedPoint[], family: FamilyRules): void {
  const { result, zero, home } = device;
  const worst = findWorstSpanError(judging, coefficients, family);
  result.spanErrorPpm = worst?.spanErrorPpm ?? null;
  result.spanRatio = worst?.spanRatio ?? null;
  if (zero && zero.degreesOfFreedom > 0) result.zeroShiftRatio = findZeroShiftRatio(home, coefficients, family) ?? null;
  const { serial, spanRatio, zeroShiftRatio } = result;
  if ((spanRatio ?? 0) > 1 || (zeroShiftRatio ?? 0) > 1)
    result.findings.push(makeFinding("device.outside_envelope", { serial, data: { spanRatio, zeroShiftRatio } }));
}

/**
 * Gives a fitted device its coefficients: its own gain where `pooled` is undefined, else the lot's gainTc with the gain
 * of its trim point. Findings and the judgement over its other loaded points are set on the result.
 */
export function trimDevice(
  device: FittedDevice,
  pooled: PooledResult | undefined,
  family: FamilyRules,
  order: Order,
): void {
  const { result, thermometer, zero } = device;
  if (!thermometer || !zero) return;
  const chosen = pooled ? pooledGain(device, pooled, family, order) : ownGain(device, order);
  if (!chosen) return;
  const [tempOffset, tempSlope] = thermometer.coefficients as [number, number];
  const [zeroMvV, zeroTc, zeroTc2] = zero.coefficients as [number, number, number | undefined];
  const { gain, gainTc, gainTc2 } = chosen.gain;
  const coefficients: Coefficients = { tempOffset, tempSlope, zero: zeroMvV, zeroTc, gain, gainTc };
  if (zeroTc2 !== undefined) {
    coefficients.zeroTc2 = zeroTc2;
    result.uncertainty.zeroTc2 = zero.standardErrors?.[2] ?? null;
  }
  if (gainTc2 !== undefined) coefficients.gainTc2 = gainTc2;
  const { serial } = result;
  if (!(gain > 0) || !Object.values(coefficients).every(Number.isFinite)) {
    result.findings.push(makeFinding("result.not_finite", { serial }));
    return;
  }
  if (Math.abs(gain - 1) > GAIN_FROM_ONE)
    result.findings.push(makeFinding("gain.far_from_nominal", { serial, data: { gain } }));
  result.coefficients = coefficients;
  result.gainFrom = chosen.from;
  if (chosen.from !== "sample-mean")
    result.residuals.gain = device.loaded.map(
      ({ point, d }) => family.nominalMvV / (point.spanMvV as number) - gainAt(coefficients, d),
    );
  judge(device, coefficients, chosen.judging, family);
}
