import { findTrimPoint } from "../device-gain";
import type { Order } from "../individual";
import type { PlacedPoint } from "../judge";
import { distanceK, gainAt } from "../predict";
import type { Coefficients, DeviceResult, FamilyRules, Method } from "../types";
import { fitWeights, weightsAt } from "./fit-weights";
import type { FindDesign, PointDesign } from "./repeats";

/** What a derivation asks of its budget. */
export interface BudgetSetting {
  family: FamilyRules;
  order: Order;
  method: Method;
  /** Ends of the proven range, as distances from the reference, K. */
  ends: readonly [number, number];
}

/** A pair of values, one for each end of the proven range. */
export type AtEnds = [low: number, high: number];

/** How the readings of one point enter a device's coefficients and its output at the ends. */
export interface PointTerm {
  place: PlacedPoint;
  design: PointDesign;
  /** Of the run that gave thermometer and zero. */
  home: boolean;
  /** ∂zeroTc/∂z, 1/K; 0 outside the home run. */
  zeroTcPerZero: number;
  /** ∂zero(end)/∂z */
  zeroPerZero: AtEnds;
  /** ∂gainTc/∂S of the device's own trim, 1/K per mV/V. */
  gainTcPerSpan: number;
  /** ∂ln gain(end)/∂S of the gain it got, 1/(mV/V). */
  lnGainPerSpan: AtEnds;
}

/** A device's points with what they do, and where its gain was taken. */
export interface DeviceTerms {
  coefficients: Coefficients;
  points: PointTerm[];
  /** Distances from the reference of the home run's points, K. */
  homeD: number[];
  /** Of the loaded point that trims a pooled gain; null for a device never loaded. */
  trimD: number | null;
  position: string | null;
}

const pairOf = (from: (k: 0 | 1) => number): AtEnds => [from(0), from(1)];

function placeAll({ points }: DeviceResult, c: Coefficients, { family }: BudgetSetting): PlacedPoint[] {
  return points.map((point) => ({ point, d: distanceK(c, point.deviceTemp, family.referenceC) }));
}

function blankTerm(place: PlacedPoint, design: PointDesign, home: boolean): PointTerm {
  return { place, design, home, zeroTcPerZero: 0, zeroPerZero: [0, 0], gainTcPerSpan: 0, lnGainPerSpan: [0, 0] };
}

function addZero(terms: readonly PointTerm[], { order, ends }: BudgetSetting): void {
  const weights = fitWeights(
    order,
    terms.map(({ place }) => place.d),
  );
  const atEnds = ends.map((end) => weightsAt(weights, end));
  terms.forEach((term, i) => {
    term.zeroTcPerZero = weights[1]?.[i] ?? 0;
    term.zeroPerZero = pairOf((k) => atEnds[k]?.[i] ?? 0);
  });
}

/** gainTc = b1/b0 of the least squares of N/S on d, to first order in the spans. */
function addOwnGain(device: DeviceResult, c: Coefficients, own: readonly PointTerm[], setting: BudgetSetting): void {
  const { family, order, method, ends } = setting;
  if (!device.individual) return;
  const { gain, gainTc } = device.individual;
  const weights = fitWeights(
    order,
    own.map(({ place }) => place.d),
  );
  const atEnds = ends.map((end) => weightsAt(weights, end));
  own.forEach((term, i) => {
    const gainPerSpan = -family.nominalMvV / (term.place.point.spanMvV as number) ** 2;
    term.gainTcPerSpan = (((weights[1]?.[i] ?? 0) - gainTc * (weights[0]?.[i] ?? 0)) / gain) * gainPerSpan;
    if (method === "individual")
      term.lnGainPerSpan = pairOf((k) => ((atEnds[k]?.[i] ?? 0) / gainAt(c, ends[k])) * gainPerSpan);
  });
}

/** Undefined for a device without coefficients, or whose readings are not known. */
export function deviceTerms(
  device: DeviceResult,
  designOf: FindDesign,
  setting: BudgetSetting,
): DeviceTerms | undefined {
  const { coefficients } = device;
  if (!coefficients) return undefined;
  const placed = placeAll(device, coefficients, setting);
  const homePurpose = placed[0]?.point.purpose;
  const points: PointTerm[] = [];
  for (const place of placed) {
    const design = designOf(place.point.purpose, device.serial, place.point.point);
    if (!design) return undefined;
    points.push(blankTerm(place, design, place.point.purpose === homePurpose));
  }
  const home = points.filter((term) => term.home);
  addZero(home, setting);
  const own = home.filter(({ place }) => place.point.spanMvV !== null);
  addOwnGain(device, coefficients, own, setting);
  const loaded = placed.filter(({ point }) => point.spanMvV !== null);
  const trim = findTrimPoint(loaded, setting.family.referenceC);
  const trimTerm = points.find(({ place }) => place === trim);
  if (trimTerm && setting.method === "pooled-gain")
    trimTerm.lnGainPerSpan = pairOf(() => -1 / (trimTerm.place.point.spanMvV as number));
  return {
    coefficients,
    points,
    homeD: home.map(({ place }) => place.d),
    trimD: trim?.d ?? null,
    position: home.find(({ design }) => design.position)?.design.position ?? null,
  };
}
