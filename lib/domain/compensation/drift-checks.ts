import type { FindingGatherer } from "./finding-gatherer";
import type { FamilyRules, Reading } from "./types";

/** What the checks over a device's temperatures need of one point. */
export interface PointSummary {
  point: number;
  chamberC: number;
  deviceTemp: number;
  /** Mean signal at load 0, mV/V; null where only loaded rows are known. */
  zeroMvV: number | null;
  loaded: boolean;
  /** Mean time under load of the loaded rows that name it, s. */
  dwellS: number | null;
  rows: readonly Reading[];
  /** When each row was taken, ms. */
  times: readonly number[];
}

const MINUTE = 60_000;
/** Steady: at most this change, K, in this time, min. Source: a load cell maker's glossary, temperature effect on span. */
const STEADY_K = 0.1;
const STEADY_MIN = 15;
/** What the noise of two readings may feign over a short time; none over the whole one (common practice, no source). */
const NOISE_K = 0.05;

function meanOf(values: readonly number[]): number {
  return values.reduce((sum, value) => sum + value, 0) / values.length;
}

/** Summary of the rows of one point of one device, in one pass. */
export function summarise(point: number, rows: readonly Reading[]): PointSummary {
  let [chamberC, deviceTemp, zero, unloaded, dwell, dwells] = [0, 0, 0, 0, 0, 0];
  const times = new Array<number>(rows.length);
  for (let i = 0; i < rows.length; i++) {
    const row = rows[i] as Reading;
    chamberC += row.chamberC;
    deviceTemp += row.deviceTemp;
    times[i] = Date.parse(row.takenAt);
    if (row.loadKg === 0) {
      zero += row.signalMvV;
      unloaded++;
    } else if (row.dwellS != null) {
      dwell += row.dwellS;
      dwells++;
    }
  }
  return {
    point,
    chamberC: chamberC / rows.length,
    deviceTemp: deviceTemp / rows.length,
    zeroMvV: unloaded > 0 ? zero / unloaded : null,
    loaded: unloaded < rows.length,
    dwellS: dwells > 0 ? dwell / dwells : null,
    rows,
    times,
  };
}

/** Lowest and highest point by chamber temperature, where these differ by more than rounding. */
function extremes(points: readonly PointSummary[]): [PointSummary, PointSummary] | undefined {
  const [first] = points;
  if (!first) return undefined;
  let [low, high] = [first, first];
  for (const point of points) {
    if (point.chamberC < low.chamberC) low = point;
    if (point.chamberC > high.chamberC) high = point;
  }
  return high.chamberC - low.chamberC > 1 ? [low, high] : undefined;
}

/** Least-squares change of the device's temperature over the time of the rows, in its own unit, and that time in min. */
function changeOf({ rows, times }: PointSummary): { change: number; minutes: number } | undefined {
  const meanTime = meanOf(times);
  let squares = 0;
  let products = 0;
  times.forEach((time, i) => {
    squares += (time - meanTime) ** 2;
    products += (time - meanTime) * (rows[i] as Reading).deviceTemp;
  });
  if (!(squares > 0)) return undefined;
  let [from, to] = [meanTime, meanTime];
  for (const time of times) {
    from = Math.min(from, time);
    to = Math.max(to, time);
  }
  return { change: (products / squares) * (to - from), minutes: (to - from) / MINUTE };
}

/**
 * The real proof of soak: repeats of one point by the time they were taken, in K by the scale that the run itself gives
 * the device's thermometer. Steady is at most 0.1 K in 15 min; over less than that, 0.05 K of reading noise, falling to
 * none at 15 min, is allowed besides, since two readings six minutes apart would feign a drift.
 */
export function checkDrift(serial: string, points: readonly PointSummary[], found: FindingGatherer): void {
  const ends = extremes(points);
  const counts = ends ? ends[1].deviceTemp - ends[0].deviceTemp : 0;
  if (!ends || counts === 0) return;
  const perCount = (ends[1].chamberC - ends[0].chamberC) / counts;
  for (const summary of points) {
    if (summary.rows.length < 2) continue;
    const seen = changeOf(summary);
    if (!seen) continue;
    const { minutes } = seen;
    const changeK = Math.abs(seen.change * perCount);
    const allowedK = (STEADY_K * minutes) / STEADY_MIN + NOISE_K * Math.max(0, 1 - minutes / STEADY_MIN);
    if (changeK <= allowedK * (1 + 1e-9)) continue;
    const driftK = (changeK * STEADY_MIN) / minutes;
    const { point, chamberC } = summary;
    const data = { driftK, limitK: STEADY_K, changeK, minutes, chamberC };
    found.add("thermometer.drifting", serial, point, driftK, data);
  }
}

/** Dwell times count as different beyond both: hands take some seconds, and creep goes with the logarithm of time. */
const DWELL_S = 10;
const DWELL_SHARE = 0.2;

/**
 * Creep under load that differs between temperatures is taken for an effect of temperature. It goes about with the
 * logarithm of time, so that a share counts: a fifth more time is about half of the logarithm from 20 to 30 min, for which
 * OIML R 60-1, 5.5.1 leaves 0.15 mpe. Below 10 s a difference is the hand's (both limits: common practice, no source).
 */
export function checkDwell(serial: string, points: readonly PointSummary[], found: FindingGatherer): void {
  const dwells = points.flatMap((point) => point.dwellS ?? []);
  if (dwells.length < 2) return;
  const shortestS = Math.min(...dwells);
  const longestS = Math.max(...dwells);
  const differenceS = longestS - shortestS;
  if (differenceS > Math.max(DWELL_S, DWELL_SHARE * shortestS))
    found.add("dwell.differs", serial, null, differenceS, { shortestS, longestS });
}

/** Back at a temperature: within the spread of one point, OIML R 60-2, 2.7.3.1, K. */
const RETURN_K = 2;

/**
 * Zero on return to an earlier temperature, the run's own drift between the two taken out. Its limit is what one step of
 * temperature may change it by, p_LC·v_min (OIML R 60-1:2021, 5.6.1): a lasting shift of that size is of its own a step.
 */
export function checkZeroReturn(
  serial: string,
  points: readonly PointSummary[],
  family: FamilyRules,
  found: FindingGatherer,
): void {
  const ends = extremes(points);
  if (!ends || ends[0].zeroMvV === null || ends[1].zeroMvV === null) return;
  const perK = (ends[1].zeroMvV - ends[0].zeroMvV) / (ends[1].chamberC - ends[0].chamberC);
  const perMvV = family.intervals / family.nominalMvV;
  const limitV = (family.pLc * family.intervals) / family.vMinRatioY;
  const rising = [...points].sort((a, b) => a.chamberC - b.chamberC);
  rising.forEach((later, i) => {
    const earlier = rising[i - 1];
    if (!earlier || earlier.zeroMvV === null || later.zeroMvV === null) return;
    const betweenK = later.chamberC - earlier.chamberC;
    const changeV = Math.abs(later.zeroMvV - earlier.zeroMvV - perK * betweenK) * perMvV;
    if (betweenK > RETURN_K || changeV <= limitV * (1 + 1e-9)) return;
    const { point, chamberC } = later;
    found.add("zero.return_difference", serial, point, changeV, { changeV, limitV, chamberC });
  });
}
