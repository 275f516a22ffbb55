import { gainAt, gainShape } from "../predict";
import type { Coefficients } from "../types";
import type { AtEnds, BudgetSetting, DeviceTerms, PointTerm } from "./device-terms";
import { fitWeights } from "./fit-weights";

/** Squares of what errors do: to gainTc, to zeroTc, and to the output at capacity at both ends, in v. */
export interface SquaredEffects {
  gainTc: number;
  zeroTc: number;
  ends: AtEnds;
}

/** The squared effects on one device of each kind of error, for a unit of it. */
export interface DeviceEffects {
  /** 1 mV/V of one unloaded row, independent from row to row. */
  unloadedRow: SquaredEffects;
  /** 1 mV/V of one loaded row, independent from row to row. */
  loadedRow: SquaredEffects;
  /** 1 mV/V by which the signal of a whole point is off, loaded rows with the unloaded ones. */
  wholePoint: SquaredEffects;
  /** 1 K of the chamber's temperature, independent from point to point. */
  chamberPoint: SquaredEffects;
  /** 1 K of the chamber's temperature, the same at all points. */
  chamberCommon: SquaredEffects;
  /** 1 K of the device's own thermometer, independent from reading to reading, and once more in use. */
  thermometer: SquaredEffects;
  /** What {@link chamberPoint} leaves in the output where the shape of gain comes from other devices. */
  chamberPooled: AtEnds;
  /** As before, for an error that rises by 1 K from the lowest to the highest point. */
  chamberPooledPerKelvin: AtEnds;
  /** 1/K of a gainTc that is not the device's own. */
  foreignGainTc: AtEnds;
}

const ENDS = [0, 1] as const;
const nothing = (): SquaredEffects => ({ gainTc: 0, zeroTc: 0, ends: [0, 0] });

function add(to: SquaredEffects, gainTc: number, zeroTc: number, ends: Readonly<AtEnds>, weight = 1): void {
  to.gainTc += weight * gainTc * gainTc;
  to.zeroTc += weight * zeroTc * zeroTc;
  for (const k of ENDS) to.ends[k] += weight * ends[k] * ends[k];
}

/** Derivative of ln(gain shape), 1/K. */
function gainSlope(c: Coefficients, d: number): number {
  return (c.gainTc + 2 * (c.gainTc2 ?? 0) * d) / gainShape(c, d);
}

/** Derivative of zero(d), mV/V/K. */
function zeroSlope(c: Coefficients, d: number): number {
  return c.zeroTc + 2 * (c.zeroTc2 ?? 0) * d;
}

/** v of the output for each mV/V of zero, at both ends. */
function perMvVOf(c: Coefficients, { family, ends }: BudgetSetting): AtEnds {
  const { intervals, nominalMvV } = family;
  return [(intervals * gainAt(c, ends[0])) / nominalMvV, (intervals * gainAt(c, ends[1])) / nominalMvV];
}

function addSignals(effects: DeviceEffects, term: PointTerm, perMvV: Readonly<AtEnds>, intervals: number): void {
  const { design, zeroTcPerZero, zeroPerZero, gainTcPerSpan, lnGainPerSpan } = term;
  const { unloadedRows, perZero, perLoadedVariance } = design;
  // An unloaded row moves zero's curve, and the span the other way.
  const unloaded = (k: 0 | 1) => -perMvV[k] * zeroPerZero[k] - intervals * lnGainPerSpan[k] * perZero;
  const loaded = (k: 0 | 1) => intervals * lnGainPerSpan[k];
  const whole = (k: 0 | 1) => -perMvV[k] * zeroPerZero[k];
  add(effects.unloadedRow, gainTcPerSpan * perZero, zeroTcPerZero, [unloaded(0), unloaded(1)], 1 / unloadedRows);
  add(effects.loadedRow, gainTcPerSpan, 0, [loaded(0), loaded(1)], perLoadedVariance);
  add(effects.wholePoint, 0, zeroTcPerZero, [whole(0), whole(1)]);
}

/** What 1 K too much in the place of one point does, as if zero and span there were off by what they change in 1 K. */
function misplaced(term: PointTerm, c: Coefficients, perMvV: Readonly<AtEnds>, intervals: number) {
  const { place, zeroTcPerZero, zeroPerZero, gainTcPerSpan, lnGainPerSpan } = term;
  const zero = zeroSlope(c, place.d);
  const span = (place.point.spanMvV ?? 0) * gainSlope(c, place.d);
  const output = (k: 0 | 1) => perMvV[k] * zeroPerZero[k] * zero + intervals * lnGainPerSpan[k] * span;
  return {
    d: place.d,
    gainTc: gainTcPerSpan * span,
    zeroTc: -zeroTcPerZero * zero,
    ends: [output(0), output(1)] as AtEnds,
  };
}

/**
 * Errors e of the thermometer at the home points enter its own calibration as well: the line fitted takes them up by
 * L(d) = Σ (a0ᵢ + a1ᵢ·d)·eᵢ, so that a point is misplaced by eᵢ − L(dᵢ), and a temperature of use by e − L(d).
 */
function addThermometer(
  to: SquaredEffects,
  { points, coefficients: c, homeD }: DeviceTerms,
  perMvV: Readonly<AtEnds>,
  { ends, family }: BudgetSetting,
): void {
  const { intervals } = family;
  const [constant = [], slope = []] = fitWeights(1, homeD);
  const inUse = (k: 0 | 1) => -perMvV[k] * zeroSlope(c, ends[k]) + intervals * gainSlope(c, ends[k]);
  const all = points.map((term) => ({ home: term.home, ...misplaced(term, c, perMvV, intervals) }));
  const sum = (value: (one: (typeof all)[number]) => number) => all.reduce((total, one) => total + value(one), 0);
  const home = all.filter((one) => one.home);
  for (const one of all) if (!one.home) add(to, 0, 0, one.ends);
  home.forEach((one, i) => {
    const line = (d: number) => (constant[i] as number) + (slope[i] as number) * d;
    const output = (k: 0 | 1) => one.ends[k] - sum((other) => other.ends[k] * line(other.d)) - inUse(k) * line(ends[k]);
    const gainTc = one.gainTc - sum((other) => other.gainTc * line(other.d));
    add(to, gainTc, one.zeroTc - sum((other) => other.zeroTc * line(other.d)), [output(0), output(1)]);
  });
  add(to, 0, 0, [inUse(0), inUse(1)]);
}

/**
 * Chamber errors at the points of the home run shift and tilt the device's thermometer, t' = t + shift + tilt·d. In its
 * zero and its own gain that only renames temperatures, so that gainTc and zeroTc change as numbers and the output does
 * not. A shape of gain that other devices gave is applied on the wrong scale between the trim point and the end.
 */
function addChamber(effects: DeviceEffects, { coefficients: c, homeD, trimD }: DeviceTerms, set: BudgetSetting): void {
  const [shift = [], tilt = []] = fitWeights(1, homeD);
  const { zeroTc, zeroTc2 = 0, gainTc, gainTc2 = 0 } = c;
  const gainBend = 2 * gainTc2 - gainTc * gainTc;
  const left = (k: 0 | 1, at: (d: number) => number): number => {
    if (trimD === null) return 0;
    const end = set.ends[k];
    return set.family.intervals * (gainSlope(c, end) * at(end) - gainSlope(c, trimD) * at(trimD));
  };
  shift.forEach((moved, j) => {
    const tilted = tilt[j] as number;
    add(effects.chamberPoint, gainTc * tilted + gainBend * moved, zeroTc * tilted + 2 * zeroTc2 * moved, [0, 0]);
    for (const k of ENDS) effects.chamberPooled[k] += left(k, (d) => moved + tilted * d) ** 2;
  });
  add(effects.chamberCommon, gainBend, 2 * zeroTc2, [0, 0]);
  const low = Math.min(...homeD);
  const range = Math.max(...homeD) - low;
  for (const k of ENDS) effects.chamberPooledPerKelvin[k] = left(k, (d) => (d - low) / range) ** 2;
}

/** Effects to first order, at the coefficients that the device got. */
export function deviceEffects(terms: DeviceTerms, setting: BudgetSetting): DeviceEffects {
  const { coefficients: c, trimD } = terms;
  const { intervals } = setting.family;
  const effects: DeviceEffects = {
    unloadedRow: nothing(),
    loadedRow: nothing(),
    wholePoint: nothing(),
    chamberPoint: nothing(),
    chamberCommon: nothing(),
    thermometer: nothing(),
    chamberPooled: [0, 0],
    chamberPooledPerKelvin: [0, 0],
    foreignGainTc: [0, 0],
  };
  const perMvV = perMvVOf(c, setting);
  for (const term of terms.points) addSignals(effects, term, perMvV, intervals);
  addThermometer(effects.thermometer, terms, perMvV, setting);
  addChamber(effects, terms, setting);
  if (trimD !== null)
    for (const k of ENDS) {
      const end = setting.ends[k];
      effects.foreignGainTc[k] = (intervals * (end / gainShape(c, end) - trimD / gainShape(c, trimD))) ** 2;
    }
  return effects;
}
