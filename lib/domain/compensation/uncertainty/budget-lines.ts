import type { DerivationResult, FamilyRules, Method } from "../types";
import type { BudgetLine, BudgetSource } from "./budget-types";
import type { CertifiedKind } from "./certificates";
import type { SquaredEffects } from "./device-effects";
import type { LotEffects } from "./lot-effects";
import type { PooledDeviation, RepeatSurvey } from "./repeats";

/** Everything that the lines are made from. */
export interface BudgetGround {
  family: FamilyRules;
  method: Method;
  pooled: DerivationResult["pooled"];
  lot: LotEffects;
  repeats: RepeatSurvey;
  certified: Record<"sensor" | "load" | "reader" | "chamber", CertifiedKind | undefined>;
  /** The end of the proven range that intervals are stated for; null where nothing is proven. */
  end: 0 | 1 | null;
}

type Known = Pick<BudgetLine, "distribution" | "value" | "unit" | "divisor" | "standard" | "df">;

const root = (square: number): number => Math.sqrt(square);

function unknown(source: BudgetSource, unit: string, words: string): BudgetLine {
  const nothing = { value: null, divisor: null, standard: null, df: null };
  return {
    source,
    words,
    distribution: "normal",
    unit,
    ...nothing,
    gainTc: null,
    zeroTc: null,
    intervals: null,
    within: null,
  };
}

/** A line whose effects are those of a unit, times its standard uncertainty. */
function lineOf(
  ground: BudgetGround,
  source: BudgetSource,
  known: Known,
  squares: SquaredEffects,
  words: string,
): BudgetLine {
  const u = known.standard ?? 0;
  return {
    source,
    words,
    ...known,
    gainTc: gainTcOf(ground, u * root(squares.gainTc)),
    zeroTc: zeroTcOf(ground, u * root(squares.zeroTc)),
    intervals: outputOf(ground, u * u, squares.ends),
    within: null,
  };
}

/** Nothing can be said of what no device has. */
const gainTcOf = ({ lot }: BudgetGround, value: number): number | null => (lot.gainDevices > 0 ? value : null);
const zeroTcOf = ({ lot }: BudgetGround, value: number): number | null => (lot.devices > 0 ? value : null);

function outputOf({ end, lot }: BudgetGround, variance: number, ends: readonly [number, number]): number | null {
  return end === null || lot.outputDevices === 0 ? null : root(variance * ends[end]);
}

/** Errors that differ from device to device are in the scatter of the sample already. */
function inScatter(ground: BudgetGround, line: BudgetLine): BudgetLine {
  const held = ground.method === "pooled-gain" && ground.pooled?.sd != null && line.gainTc !== null;
  return held ? { ...line, within: "sample.scatter" } : line;
}

function certificateOf({ expanded, standard }: CertifiedKind, unit: string): Known {
  return {
    distribution: "normal",
    value: expanded,
    unit,
    divisor: standard > 0 ? expanded / standard : null,
    standard,
    df: null,
  };
}

function named({ codes, runsWithout }: CertifiedKind): string {
  const open =
    runsWithout === 0 ? "" : runsWithout === 1 ? " (one run names none)" : ` (${runsWithout} runs name none)`;
  return `${codes.join(", ")}${open}`;
}

function scatterLine(ground: BudgetGround): BudgetLine[] {
  const { pooled, method, lot } = ground;
  if (method === "individual") return [];
  const source = "sample.scatter" as const;
  if (pooled?.sd == null)
    return [unknown(source, "1/K", "Fewer than two sample devices: the lot's scatter is not known.")];
  const { sd, n } = pooled;
  const known: Known = {
    distribution: "normal",
    value: sd,
    unit: "1/K",
    divisor: root(n),
    standard: sd / root(n),
    df: n - 1,
  };
  const words =
    `Scatter of gainTc among ${n} sample devices: by √n in the mean, by √(1 + 1/n) in the output of a single device, ` +
    "whose own gainTc is not known.";
  const intervals = outputOf(ground, sd * sd * (1 + 1 / n), lot.pairs.foreignGainTc);
  return [{ source, words, ...known, gainTc: known.standard, zeroTc: zeroTcOf(ground, 0), intervals, within: null }];
}

function repeatLine(ground: BudgetGround, which: "unloaded" | "loaded", found: PooledDeviation | null): BudgetLine {
  const source = `repeatability.${which}` as const;
  if (!found) return unknown(source, "mV/V", `No repeats: no ${which} reading was taken twice.`);
  const { sd, degreesOfFreedom } = found;
  const known: Known = {
    distribution: "normal",
    value: sd,
    unit: "mV/V",
    divisor: 1,
    standard: sd,
    df: degreesOfFreedom,
  };
  const words = `One ${which} reading, pooled over all repeats; means of repeats have less.`;
  const squares = which === "unloaded" ? ground.lot.kinds.unloadedRow : ground.lot.kinds.loadedRow;
  return inScatter(ground, lineOf(ground, source, known, squares, words));
}

function sensorLines(ground: BudgetGround): BudgetLine[] {
  const { lot, certified, method } = ground;
  const { sensor } = certified;
  if (!sensor) {
    const words = "No run names its reference sensor.";
    return [unknown("sensor.common", "K", words), unknown("sensor.independent", "K", words)];
  }
  const known = certificateOf(sensor, "K");
  const common = lineOf(
    ground,
    "sensor.common",
    known,
    lot.kinds.chamberCommon,
    `Certificate of ${named(sensor)}, taken as one offset at all temperatures: it cancels in differences of temperature, ` +
      "and bends gainTc and the terms of second order only.",
  );
  const cancels = method === "individual" || sensor.same;
  const independent = lineOf(
    ground,
    "sensor.independent",
    known,
    lot.kinds.chamberPoint,
    "The same certificate, taken as independent from temperature to temperature: certificates don't say how much of it is " +
      "common, so this is its most. " +
      (cancels
        ? "The output keeps nothing of it: what gave the coefficients is read on the same scale."
        : "The runs name different sensors, so that the scale of the sample and that of a device differ by both."),
  );
  if (cancels) return [common, independent];
  const intervals = outputOf(ground, 2 * sensor.standard ** 2, lot.pairs.chamberPooled);
  return [common, { ...independent, intervals }];
}

function chamberLine(ground: BudgetGround): BudgetLine {
  const { lot, certified, method } = ground;
  const source = "chamber.uniformity" as const;
  if (!certified.chamber || lot.chamberVarianceK2 === null) return unknown(source, "K", "No run names its chamber.");
  const standard = root(lot.chamberVarianceK2);
  const known: Known = { distribution: "normal", value: standard, unit: "K", divisor: 1, standard, df: null };
  const from = lot.byPosition
    ? "at the devices' places: certified deviation, not corrected for, with its uncertainty"
    : "from its certificate; the readings name no place that it knows";
  const words =
    `Temperature in ${named(certified.chamber)} against the reference sensor, ${from}. Taken as independent from ` +
    "temperature to temperature; a deviation that is the same at all of them cancels.";
  const line = lineOf(ground, source, { ...known }, { ...lot.kinds.chamberByPlace }, words);
  // The squares hold the variance of each device's place already.
  const effects = {
    gainTc: gainTcOf(ground, root(lot.kinds.chamberByPlace.gainTc)),
    zeroTc: zeroTcOf(ground, root(lot.kinds.chamberByPlace.zeroTc)),
    intervals:
      method === "individual" ? outputOf(ground, 0, [0, 0]) : outputOf(ground, 1, lot.pairs.chamberPooledByPlace),
  };
  return inScatter(ground, { ...line, ...effects });
}

/** An error of the same share at all points: it scales gain and leaves gainTc alone. */
function scaleLine(ground: BudgetGround, kind: "load" | "reader", unit: string, perUnit: number | null): BudgetLine {
  const source = `${kind}.certificate` as const;
  const piece = ground.certified[kind];
  const what = kind === "load" ? "load" : "reader";
  if (!piece) return unknown(source, unit, `No run names its ${what}.`);
  if (perUnit === null) return unknown(source, unit, `Nothing was loaded, so that the ${what} enters no gain.`);
  const share = piece.standard * perUnit;
  const words =
    kind === "load"
      ? `Certificate of ${named(piece)}: the same share at all temperatures, so that it cancels in gainTc and stays in gain.`
      : `Certificate of ${named(piece)}, taken as the same share of the loaded signal at all temperatures: it cancels in gainTc.`;
  return {
    source,
    words,
    ...certificateOf(piece, unit),
    gainTc: gainTcOf(ground, 0),
    zeroTc: zeroTcOf(ground, kind === "load" ? 0 : share * root(ground.lot.zeroTcSquare)),
    intervals: ground.end === null || ground.lot.outputDevices === 0 ? null : share * ground.family.intervals,
    within: null,
  };
}

function zeroReturnLine(ground: BudgetGround): BudgetLine {
  const { returns, zeroReturnSquare, kinds } = ground.lot;
  const source = "zero.return" as const;
  if (returns === 0)
    return unknown(source, "mV/V", "No point returns to an earlier temperature: how zero comes back is not known.");
  const value = root(zeroReturnSquare);
  const divisor = 2 * root(3);
  const known: Known = {
    distribution: "rectangular",
    value,
    unit: "mV/V",
    divisor,
    standard: value / divisor,
    df: returns,
  };
  const words =
    `Difference of zero on return (root mean square of ${returns} ${returns === 1 ? "device" : "devices"}): zero at any ` +
    "point may lie anywhere within it. Span is read within one point and keeps nothing of it.";
  return lineOf(ground, source, known, kinds.wholePoint, words);
}

function thermometerLine(ground: BudgetGround): BudgetLine {
  const { thermometerFreedom: df, thermometerVariance, kinds } = ground.lot;
  const source = "device.thermometer" as const;
  if (df === 0)
    return unknown(
      source,
      "K",
      "The thermometers' lines pass through all their points: no residual shows their error.",
    );
  const standard = root(thermometerVariance);
  const known: Known = { distribution: "normal", value: standard, unit: "K", divisor: 1, standard, df };
  const words =
    "Residuals of the devices' own thermometers, pooled, at the points and once more in use. Part of them is the chamber's, " +
    "so this is its most.";
  return inScatter(ground, lineOf(ground, source, known, kinds.thermometer, words));
}

/** All lines, in the order in which people read them. */
export function budgetLines(ground: BudgetGround): BudgetLine[] {
  const { repeats, family } = ground;
  const kg = repeats.meanLoadKg;
  return [
    ...scatterLine(ground),
    repeatLine(ground, "unloaded", repeats.unloaded),
    repeatLine(ground, "loaded", repeats.loaded),
    ...sensorLines(ground),
    chamberLine(ground),
    scaleLine(ground, "load", "kg", kg === null ? null : 1 / kg),
    scaleLine(ground, "reader", "mV/V", kg === null ? null : family.capacityKg / (family.nominalMvV * kg)),
    zeroReturnLine(ground),
    thermometerLine(ground),
  ];
}
