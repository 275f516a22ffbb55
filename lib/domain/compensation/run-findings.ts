import { finish, forEachInSteps, type Steps } from "@/lib/domain/steps";
import { checkDrift, checkDwell, checkZeroReturn, type PointSummary, summarise } from "./drift-checks";
import { maximumPermissibleError } from "./envelope";
import { FindingGatherer } from "./finding-gatherer";
import { makeFinding } from "./findings";
import { findGrubbsStatistic, grubbsCritical } from "./grubbs";
import { checkClock, checkDuplicates, checkPointOrder } from "./order-checks";
import { groupByTemperature } from "./points";
import { type DeviceRows, rowsByDeviceInSteps } from "./reading-groups";
import { spreadOf } from "./sample-statistics";
import type { FamilyRules, Finding, Purpose, Reading } from "./types";

/** Spread of the chamber within a point, K: OIML R 60-2:2021, 2.7.3.1. */
const STABLE_K = 2;
/** A span run further than this from the reference is at another distinct temperature. */
const SPAN_NEAR_K = 5;
/** Outlier test on repeats: fewer can't show one; level over all repeats of a run. */
const REPEATS_MIN = 5;
const OUTLIER_ALPHA = 0.01;

function checkRow(reading: Reading, family: FamilyRules, found: FindingGatherer): void {
  const { serial, point, soakMin, loadKg, row } = reading;
  const { minSoakMinutes, minLoadFraction, capacityKg } = family;
  if (soakMin < minSoakMinutes) found.add("soak.too_short", serial, point, -soakMin, { soakMin, minSoakMinutes, row });
  const minLoadKg = minLoadFraction * capacityKg;
  // The threshold is a product of decimals: a load written exactly at it is not below.
  if (loadKg > 0 && loadKg < minLoadKg * (1 - 1e-12))
    found.add("load.below_threshold", serial, point, -loadKg, { loadKg, minLoadKg, row });
  if (loadKg > capacityKg) found.add("load.above_capacity", serial, point, loadKg, { loadKg, capacityKg, row });
}

function checkChamber(rows: readonly Reading[], found: FindingGatherer): void {
  const spreadK = spreadOf(rows.map((row) => row.chamberC));
  const first = rows[0];
  if (first && spreadK > STABLE_K)
    found.add("point.unstable", first.serial, first.point, spreadK, { spreadK, limitK: STABLE_K });
}

/** Repeats of one key: rows of it, and what of the signal should be equal in each. */
interface Repeats {
  rows: Reading[];
  /** In verification intervals. */
  values: number[];
  /** Load in verification intervals. */
  load: number;
}

/** Unloaded repeats as signals, loaded ones as spans brought to their mean load; both in v. */
function repeatsOf(rows: readonly Reading[], family: FamilyRules): Repeats[] {
  const perMvV = family.intervals / family.nominalMvV;
  const unloaded = rows.filter((row) => row.loadKg === 0);
  const loaded = rows.filter((row) => row.loadKg > 0);
  const zero = unloaded.reduce((sum, row) => sum + row.signalMvV / unloaded.length, 0);
  const kg = loaded.reduce((sum, row) => sum + row.loadKg / loaded.length, 0);
  const repeats: Repeats[] = [];
  if (unloaded.length > 1)
    repeats.push({ rows: unloaded, values: unloaded.map((row) => row.signalMvV * perMvV), load: 0 });
  if (loaded.length > 1) {
    const values = loaded.map((row) => ((row.signalMvV - zero) * perMvV * kg) / row.loadKg);
    repeats.push({ rows: loaded, values, load: (kg / family.capacityKg) * family.intervals });
  }
  return repeats;
}

function checkScatter({ rows, values, load }: Repeats, family: FamilyRules, found: FindingGatherer): void {
  const spreadV = spreadOf(values);
  const limitV = maximumPermissibleError(load, family);
  const first = rows[0];
  if (first && spreadV > limitV)
    found.add("repeats.scatter", first.serial, first.point, spreadV / limitV, { spreadV, limitV, row: first.row });
}

/** Grubbs on every set of repeats that is large enough, at a level shared by all of them. */
function* checkOutliers(all: readonly Repeats[], found: FindingGatherer): Steps<void> {
  const critical = new Map<number, number>();
  yield* forEachInSteps(all, ({ rows, values }) => {
    const n = values.length;
    const statistic = findGrubbsStatistic(values);
    if (!statistic) return;
    let limit = critical.get(n);
    if (limit === undefined) {
      limit = grubbsCritical(n, OUTLIER_ALPHA / all.length);
      critical.set(n, limit);
    }
    const { row, serial, point } = rows[statistic.index] as Reading;
    if (statistic.g > limit)
      found.add("reading.outlier", serial, point, statistic.g / limit, { row, g: statistic.g, critical: limit });
  });
}

/** Whether the device's own temperature rises (or falls) with the chamber from each distinct temperature to the next. */
function followsChamber(groups: readonly PointSummary[][]): boolean {
  const means = groups.map((group) => group.reduce((sum, point) => sum + point.deviceTemp / group.length, 0));
  const steps = means.slice(1).map((mean, i) => Math.sign(mean - (means[i] as number)));
  return steps.every((step) => step !== 0 && step === steps[0]);
}

/** Checks over a device's temperatures in a run that is to have several. Returns whether a temperature came twice. */
function checkTemperatures(
  serial: string,
  points: readonly PointSummary[],
  family: FamilyRules,
  found: FindingGatherer,
): boolean {
  const groups = groupByTemperature(points);
  const spanK = spreadOf(points.map((point) => point.chamberC));
  const { minTemperatureSpanK } = family;
  if (groups.length < 2) found.add("temperatures.not_distinct", serial, null, 0, {});
  if (spanK < minTemperatureSpanK - 1e-9)
    found.add("span.temperature_too_small", serial, null, -spanK, { spanK, minTemperatureSpanK });
  if (!followsChamber(groups)) found.add("thermometer.not_monotonic", serial, null, 0, {});
  return groups.some((group) => group.length > 1);
}

function checkLoads(
  serial: string,
  points: readonly PointSummary[],
  purpose: Purpose,
  family: FamilyRules,
  found: FindingGatherer,
): void {
  const { referenceC } = family;
  for (const { point, loaded, chamberC } of points) {
    if (!loaded) found.add("load.missing", serial, point, 0, {});
    const away = Math.abs(chamberC - referenceC);
    if (purpose === "span" && away > SPAN_NEAR_K)
      found.add("span.far_from_reference", serial, point, away, { chamberC, referenceC });
  }
}

/** A number that equal readings share and others hardly ever do; {@link sameReadings} settles it. */
function fingerprint(points: DeviceRows): number {
  let mixed = 0;
  for (const rows of points.values())
    for (const { signalMvV, deviceTemp, loadKg } of rows)
      mixed = mixed * 0.6180339887 + signalMvV * 1.324717957 + deviceTemp * 0.0754877666 + loadKg;
  return mixed;
}

function sameReadings(a: DeviceRows, b: DeviceRows): boolean {
  if (a.size !== b.size) return false;
  for (const [point, rows] of a) {
    const others = b.get(point);
    if (others?.length !== rows.length) return false;
    const same = rows.every((row, i) => {
      const other = others[i] as Reading;
      return row.signalMvV === other.signalMvV && row.deviceTemp === other.deviceTemp && row.loadKg === other.loadKg;
    });
    if (!same) return false;
  }
  return true;
}

/** Devices whose readings equal those of another one digit for digit, which real ones never do. */
function* checkCopies(devices: ReadonlyMap<string, DeviceRows>): Steps<Finding[]> {
  const seen = new Map<number, DeviceRows>();
  const copies: string[] = [];
  yield* forEachInSteps(devices, ([serial, points]) => {
    const key = fingerprint(points);
    const earlier = seen.get(key);
    if (!earlier) seen.set(key, points);
    else if (sameReadings(earlier, points)) copies.push(serial);
  });
  if (copies.length === 0) return [];
  const serial = copies.length === 1 ? copies[0] : null;
  return [makeFinding("reading.copied", { serial, data: { devices: copies.length, serials: copies.slice(0, 20) } })];
}

/** Points at which most devices of the run were read. */
function* usualPoints(devices: ReadonlyMap<string, DeviceRows>): Steps<number[]> {
  const counts = new Map<number, number>();
  yield* forEachInSteps(devices.values(), (points) => {
    for (const point of points.keys()) counts.set(point, (counts.get(point) ?? 0) + 1);
  });
  return [...counts].filter(([, count]) => count > devices.size / 2).map(([point]) => point);
}

/** What the checks of a run share. */
interface RunScope {
  family: FamilyRules;
  purpose: Purpose;
  /** Points that a device of the run is expected to have. */
  usual: readonly number[];
  found: FindingGatherer;
  /** Takes sets of repeats that are large enough for the outlier test. */
  manyRepeats: Repeats[];
}

const hasSeveralTemperatures = (purpose: Purpose) =>
  purpose === "sample" || purpose === "zero" || purpose === "verification";
const hasLoads = (purpose: Purpose) => purpose === "sample" || purpose === "span" || purpose === "verification";

function checkPoint(serial: string, point: number, rows: Reading[], scope: RunScope): PointSummary {
  const { family, found, manyRepeats } = scope;
  const summary = summarise(point, rows);
  checkClock(serial, summary, found);
  checkDuplicates(serial, summary, found);
  checkChamber(rows, found);
  for (const repeats of repeatsOf(rows, family)) {
    checkScatter(repeats, family, found);
    if (repeats.values.length >= REPEATS_MIN) manyRepeats.push(repeats);
  }
  return summary;
}

/** Checks over all points of a device. Returns whether a temperature came twice. */
function checkDevice(serial: string, rowsByPoint: DeviceRows, scope: RunScope): boolean {
  const { family, purpose, usual, found } = scope;
  const points = [...rowsByPoint].map(([point, rows]) => checkPoint(serial, point, rows, scope));
  let returned = false;
  checkPointOrder(serial, points, found);
  if (hasSeveralTemperatures(purpose)) {
    returned = checkTemperatures(serial, points, family, found);
    checkDrift(serial, points, found);
    checkDwell(serial, points, found);
    checkZeroReturn(serial, points, family, found);
  }
  if (hasLoads(purpose)) checkLoads(serial, points, purpose, family, found);
  for (const point of usual) if (!rowsByPoint.has(point)) found.add("point.missing", serial, point, 0, {});
  return returned;
}

/**
 * What to know about a run whose rows are in order: equal findings of many devices are gathered, one a code and point.
 * @param readings rows that {@link checkRun} took.
 */
export function listRunFindings(family: FamilyRules, purpose: Purpose, readings: readonly Reading[]): Finding[] {
  return finish(listRunFindingsInSteps(family, purpose, readings));
}

/** {@link listRunFindings} for a process that serves others meanwhile. */
export function* listRunFindingsInSteps(
  family: FamilyRules,
  purpose: Purpose,
  readings: readonly Reading[],
): Steps<Finding[]> {
  const found = new FindingGatherer();
  const devices = yield* rowsByDeviceInSteps(readings);
  const scope: RunScope = { family, purpose, usual: yield* usualPoints(devices), found, manyRepeats: [] };
  yield* forEachInSteps(readings, (reading) => checkRow(reading, family, found));
  let returned = false;
  for (const [serial, rowsByPoint] of devices) {
    returned = checkDevice(serial, rowsByPoint, scope) || returned;
    yield;
  }
  yield* checkOutliers(scope.manyRepeats, found);
  const single = hasSeveralTemperatures(purpose) && !returned;
  const notes = single ? [makeFinding("point.no_return", { data: { purpose } })] : [];
  return [...found.list(), ...(yield* checkCopies(devices)), ...notes];
}
