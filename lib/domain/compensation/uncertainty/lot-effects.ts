import { groupByTemperature } from "../points";
import { distanceK, zeroAt } from "../predict";
import type { DeviceResult } from "../types";
import { chamberVariance, type RunCertificate } from "./certificates";
import { type DeviceEffects, deviceEffects, type SquaredEffects } from "./device-effects";
import { type AtEnds, type BudgetSetting, type DeviceTerms, deviceTerms } from "./device-terms";
import type { FindDesign } from "./repeats";

const KINDS = [
  "unloadedRow",
  "loadedRow",
  "wholePoint",
  "chamberPoint",
  "chamberCommon",
  "thermometer",
  "chamberByPlace",
] as const;
type Kind = (typeof KINDS)[number];

const PAIRS = ["chamberPooled", "chamberPooledPerKelvin", "foreignGainTc", "chamberPooledByPlace"] as const;
type Pair = (typeof PAIRS)[number];

/**
 * Mean squared effects over the devices of a derivation. gainTc of a pooled gain is the mean of the sample's trims, so
 * that errors independent from device to device count there with 1/n; all else speaks of a single, typical device.
 */
export interface LotEffects {
  kinds: Record<Kind, SquaredEffects>;
  pairs: Record<Pair, AtEnds>;
  /** Mean of zeroTc², (mV/V/K)². */
  zeroTcSquare: number;
  /** Mean variance of the chamber's temperature at the devices' places, K²; null where no chamber is named. */
  chamberVarianceK2: number | null;
  /** Whether the places came from the readings and the chamber's certificate. */
  byPosition: boolean;
  /** Mean of squared zero return differences, (mV/V)², over `returns` devices. */
  zeroReturnSquare: number;
  returns: number;
  /** Pooled variance of the thermometers' residuals, K², with its degrees of freedom. */
  thermometerVariance: number;
  thermometerFreedom: number;
  devices: number;
  gainDevices: number;
  outputDevices: number;
}

const blank = (): SquaredEffects => ({ gainTc: 0, zeroTc: 0, ends: [0, 0] });

function emptyEffects(): LotEffects {
  return {
    kinds: Object.fromEntries(KINDS.map((kind) => [kind, blank()])) as Record<Kind, SquaredEffects>,
    pairs: Object.fromEntries(PAIRS.map((pair) => [pair, [0, 0]])) as unknown as Record<Pair, AtEnds>,
    zeroTcSquare: 0,
    chamberVarianceK2: null,
    byPosition: false,
    zeroReturnSquare: 0,
    returns: 0,
    thermometerVariance: 0,
    thermometerFreedom: 0,
    devices: 0,
    gainDevices: 0,
    outputDevices: 0,
  };
}

interface Part {
  gainTc: boolean;
  output: boolean;
  weight: number;
}

function addEffects(to: SquaredEffects, { gainTc, zeroTc, ends }: SquaredEffects, part: Part): void {
  if (part.gainTc) to.gainTc += part.weight * gainTc;
  to.zeroTc += part.weight * zeroTc;
  if (part.output) addPair(to.ends, ends, part.weight);
}

function addPair(to: AtEnds, from: Readonly<AtEnds>, weight: number): void {
  to[0] += weight * from[0];
  to[1] += weight * from[1];
}

function addDevice(lot: LotEffects, effects: DeviceEffects, part: Omit<Part, "weight">, placeVariance: number): void {
  const { chamberPooled, chamberPooledPerKelvin, foreignGainTc, ...kinds } = effects;
  for (const [kind, squares] of Object.entries(kinds) as [Exclude<Kind, "chamberByPlace">, SquaredEffects][])
    addEffects(lot.kinds[kind], squares, { ...part, weight: 1 });
  addEffects(lot.kinds.chamberByPlace, effects.chamberPoint, { ...part, weight: placeVariance });
  if (!part.output) return;
  addPair(lot.pairs.chamberPooled, chamberPooled, 1);
  addPair(lot.pairs.chamberPooledPerKelvin, chamberPooledPerKelvin, 1);
  addPair(lot.pairs.foreignGainTc, foreignGainTc, 1);
  addPair(lot.pairs.chamberPooledByPlace, chamberPooled, placeVariance);
}

/** Largest difference of zero between readings at one temperature, the curve's change between them taken out. */
function zeroReturn(device: DeviceResult, { coefficients }: DeviceTerms, referenceC: number): number | undefined {
  const home = device.points.filter(({ purpose }) => purpose === device.points[0]?.purpose);
  let largest: number | undefined;
  for (const group of groupByTemperature(home)) {
    if (group.length < 2) continue;
    const left = group.map((p) => p.zeroMvV - zeroAt(coefficients, distanceK(coefficients, p.deviceTemp, referenceC)));
    largest = Math.max(largest ?? 0, Math.max(...left) - Math.min(...left));
  }
  return largest;
}

function addObserved(lot: LotEffects, device: DeviceResult, terms: DeviceTerms, referenceC: number): void {
  lot.zeroTcSquare += terms.coefficients.zeroTc ** 2;
  const change = zeroReturn(device, terms, referenceC);
  if (change !== undefined) {
    lot.zeroReturnSquare += change * change;
    lot.returns++;
  }
  const { residualSdTemperature, degreesOfFreedomTemperature } = device.uncertainty;
  if (residualSdTemperature === null) return;
  lot.thermometerVariance += residualSdTemperature ** 2 * degreesOfFreedomTemperature;
  lot.thermometerFreedom += degreesOfFreedomTemperature;
}

function takeMeans(lot: LotEffects, setting: BudgetSetting, chambers: { variance: number; count: number }): void {
  const { devices, gainDevices, outputDevices } = lot;
  const ofGainTc = setting.method === "pooled-gain" ? gainDevices * gainDevices : gainDevices;
  for (const squares of Object.values(lot.kinds)) {
    squares.gainTc /= ofGainTc || 1;
    squares.zeroTc /= devices || 1;
    for (const k of [0, 1] as const) squares.ends[k] /= outputDevices || 1;
  }
  for (const pair of Object.values(lot.pairs)) for (const k of [0, 1] as const) pair[k] /= outputDevices || 1;
  lot.zeroTcSquare /= devices || 1;
  lot.zeroReturnSquare /= lot.returns || 1;
  lot.thermometerVariance /= lot.thermometerFreedom || 1;
  if (chambers.count > 0) lot.chamberVarianceK2 = chambers.variance / chambers.count;
}

/** Sensitivities come from the way devices were read, which a lot shares: so many of them show it. */
const SHOWN_MAX = 1000;

/** The sample, which gives gainTc, whole; of the others at most a thousand, evenly over the lot. */
function typicalDevices(devices: readonly DeviceResult[]): DeviceResult[] {
  const step = Math.max(1, Math.ceil(devices.length / SHOWN_MAX));
  return devices.filter((device, i) => device.role === "sample" || i % step === 0);
}

/** Sums over the sample and at most a thousand other devices that got coefficients. */
export function lotEffects(
  devices: readonly DeviceResult[],
  designOf: FindDesign,
  setting: BudgetSetting,
  certificates: readonly RunCertificate[],
): LotEffects {
  const lot = emptyEffects();
  const chamberOf = new Map(certificates.filter((one) => one.kind === "chamber").map((one) => [one.runId, one]));
  const chambers = { variance: 0, count: 0 };
  for (const device of typicalDevices(devices)) {
    const terms = deviceTerms(device, designOf, setting);
    if (!terms) continue;
    const chamber = chamberOf.get(terms.points[0]?.design.runId ?? "");
    const placeVariance = chamber ? chamberVariance(chamber, terms.position) : 0;
    if (chamber) {
      chambers.variance += placeVariance;
      chambers.count++;
      lot.byPosition ||= chamber.positions.some(({ position }) => position === terms.position);
    }
    const sampled = device.role === "sample" && device.individual !== null;
    const part = {
      gainTc: setting.method === "individual" || sampled,
      output: device.gainFrom !== "sample-mean",
    };
    lot.devices++;
    if (part.gainTc) lot.gainDevices++;
    if (part.output) lot.outputDevices++;
    addDevice(lot, deviceEffects(terms, setting), part, placeVariance);
    addObserved(lot, device, terms, setting.family.referenceC);
  }
  takeMeans(lot, setting, chambers);
  return lot;
}
