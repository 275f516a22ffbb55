import type { EnvelopeSurvey } from "./survey-envelope";
import type { UncertaintyBudget } from "./uncertainty/budget-types";

/**
 * Shapes of the compensation arithmetic. Temperatures in °C, differences in K, loads in kg, signals in mV/V;
 * gain has no unit, gainTc is in 1/K, gainTc2 in 1/K². A value that has no basis is `null`, never 0 and never NaN.
 */

/** What a thermal run is for. */
export type Purpose = "sample" | "zero" | "span" | "verification" | "proof";

/** Gain's temperature coefficient from the device's own points, or from the lot's sample. */
export type Method = "individual" | "pooled-gain";

/** hard blocks approval, soft needs an acknowledgement with a reason, note informs. */
export type Severity = "hard" | "soft" | "note";

export type AccuracyClass = "A" | "B" | "C" | "D";

/** The values of a family revision that the arithmetic needs. */
export interface FamilyRules {
  code?: string;
  /** Rated capacity Emax, kg. */
  capacityKg: number;
  /** Output at capacity, mV/V. */
  nominalMvV: number;
  referenceC: number;
  accuracyClass: AccuracyClass;
  /** Number of verification intervals n. */
  intervals: number;
  /** Y = (Emax − Emin) / v_min. */
  vMinRatioY: number;
  /** Fraction of the instrument's error given to the cell, p_LC. */
  pLc: number;
  temperatureMinC: number;
  temperatureMaxC: number;
  minSoakMinutes: number;
  /** Least load of a loaded reading as a fraction of capacity. */
  minLoadFraction: number;
  minTemperatureSpanK: number;
  /** Share of the error envelope that the spread of gainTc may use, 0…1. */
  temperatureShare: number;
  /** Share of the lot the tolerance interval has to cover, 0…1. */
  coverage: number;
  /** Confidence of the tolerance and the confidence interval, 0…1. */
  confidence: number;
}

/** One measured row of a run. */
export interface Reading {
  /** Line of the file, the header being 1. */
  row: number;
  serial: string;
  /** Integer that names one temperature of the run. */
  point: number;
  /** By the reference sensor, its certificate's correction applied. */
  chamberC: number;
  /** Minutes since the chamber stayed within 0.5 K. */
  soakMin: number;
  /** The device's own temperature reading, in its own unit. */
  deviceTemp: number;
  /** Above the fixture's dead load; 0 for the unloaded reading. */
  loadKg: number;
  /** Uncompensated output. */
  signalMvV: number;
  /** RFC 3339. */
  takenAt: string;
  position?: string | null;
  hardwareId?: string | null;
  /** Seconds under load before the reading. */
  dwellS?: number | null;
  /** Compensated output, proof runs only. */
  outputMvV?: number | null;
}

export interface RunReadings {
  id: string;
  purpose: Purpose;
  /** Id of the run that this one replaces; the rows of that run are then not used. */
  supersedes?: string | null;
  readings: readonly Reading[];
}

/** Gain as a function of d = t − reference: gain·(1 + gainTc·d (+ gainTc2·d²)). */
export interface GainCoefficients {
  gain: number;
  gainTc: number;
  /** Order 2 only. */
  gainTc2?: number;
}

/**
 * The values of one device. Thermometer t = tempOffset + tempSlope·u; d = t − reference;
 * zero(d) = zero + zeroTc·d (+ zeroTc2·d²) in mV/V.
 */
export interface Coefficients extends GainCoefficients {
  tempOffset: number;
  tempSlope: number;
  zero: number;
  zeroTc: number;
  /** Order 2 only. */
  zeroTc2?: number;
}

/** One thing to know about a run, a device (`serial`) or the whole derivation (`serial` null). */
export interface Finding {
  /** `noun.reason`, stable. */
  code: string;
  severity: Severity;
  serial: string | null;
  point: number | null;
  message: string;
  data?: Record<string, unknown>;
}

export type Role = "sample" | "zero" | "verification" | "excluded";

export type GainSource = "own-points" | "span-run" | "sample-mean";

/** Means of one device at one point of one run. */
export interface DevicePoint {
  purpose: Purpose;
  point: number;
  chamberC: number;
  deviceTemp: number;
  /** Mean signal at load 0. */
  zeroMvV: number;
  /** Mean signal less zero, scaled to capacity; null where the point has no loaded row. */
  spanMvV: number | null;
}

/** Residuals measured − fitted, in the order of the home run's points (gain: of its loaded points). */
export interface DeviceResiduals {
  /** K */
  temperature: number[];
  /** mV/V */
  zero: number[];
  /** Needed gain N/S − gain(d), over every loaded point of the device; null where it has no gain of its own. */
  gain: number[] | null;
}

/** Standard errors and residual deviations; null without a degree of freedom. */
export interface DeviceUncertainty {
  zero: number | null;
  zeroTc: number | null;
  gain: number | null;
  gainTc: number | null;
  /** Order 2 only; missing from results of before it was kept. */
  zeroTc2?: number | null;
  /** Order 2 with a gain of the device's own only. */
  gainTc2?: number | null;
  residualSdTemperature: number | null;
  residualSdZero: number | null;
  residualSdGain: number | null;
  degreesOfFreedomTemperature: number;
  degreesOfFreedomZero: number;
  /** 0 for a pooled gain. */
  degreesOfFreedomGain: number;
}

export interface DeviceResult {
  serial: string;
  role: Role;
  /** Null for an excluded device and wherever a hard finding says why. */
  coefficients: Coefficients | null;
  /** Gain fitted to the device's own loaded points of its home run, whatever the method. */
  individual: GainCoefficients | null;
  residuals: DeviceResiduals;
  uncertainty: DeviceUncertainty;
  /** Home run first, then span and verification runs; each in rising point number. */
  points: DevicePoint[];
  /** Chamber temperatures of the loaded points, in the order of `points`. */
  loadedAtC: number[];
  gainFrom: GainSource | null;
  /** The span error of largest magnitude, signed, ppm. */
  spanErrorPpm: number | null;
  /** Largest share of the error envelope that the span errors use; ≤ 1 is inside. */
  spanRatio: number | null;
  /** Largest share of the limit for the shift of the output at minimum load; ≤ 1 is inside. */
  zeroShiftRatio: number | null;
  /** Lowest and highest chamber temperature of the home run (of all runs where there is none). */
  measuredRangeC: [number, number];
  findings: Finding[];
}

export type PooledVerdict = "inside" | "outside" | "not-judged";

/** What the sample says about the lot's gainTc, 1/K. */
export interface PooledResult {
  gainTc: number;
  /** Order 2 only, 1/K². */
  gainTc2?: number;
  /** Sample standard deviation of gainTc, n − 1; null for one device. */
  sd: number | null;
  n: number;
  /** Mean of the sample's individual gains. */
  meanGain: number;
  /** Sample standard deviation of the individual gains. */
  sdGain: number | null;
  confidenceInterval: [number, number] | null;
  toleranceInterval: [number, number] | null;
  /** Exact two-sided factor k. */
  toleranceFactor: number | null;
  coverage: number;
  confidence: number;
  /** Pooling limit: k·sd may not exceed it. */
  limit: number;
  verdict: PooledVerdict;
  /**
   * At least this share of the lot has its gainTc within the limit of the mean, at the confidence (exact, normal lot);
   * null below two devices. Missing, as the next two, from results of before these were computed.
   */
  shareExpected?: number | null;
  /** The share within the limit, were mean and sd the lot's own: a point estimate. */
  shareEstimate?: number | null;
  /** Sample devices in total, at least 5, with which this sd would come out inside; null where no number does. */
  sampleNeeded?: number | null;
}

export interface VerificationResult {
  serial: string;
  spanErrorPpm: number | null;
  spanRatio: number | null;
  zeroShiftRatio: number | null;
  /** Null where nothing could be judged. */
  passed: boolean | null;
  /** Names of the ratios that were judged: `spanRatio`, `zeroShiftRatio`. */
  judged: string[];
}

export interface Exclusion {
  serial: string;
  reason: string;
}

export interface DerivationInput {
  family: FamilyRules;
  method: Method;
  order: 1 | 2;
  runs: readonly RunReadings[];
  exclude: readonly Exclusion[];
}

export interface DerivationResult {
  /** By serial, rising. */
  devices: DeviceResult[];
  pooled: PooledResult | null;
  verification: VerificationResult[];
  /** Of the lot and of the runs; findings of a single device stand with the device. */
  findings: Finding[];
  /** Null where no device got coefficients. */
  provenRange: [number, number] | null;
  /** Version of this arithmetic. */
  engine: string;
  /** Filled in where the certificates of the runs' equipment are known. */
  uncertainty?: UncertaintyBudget;
  /** Filled in with the budget. */
  envelope?: EnvelopeSurvey;
}
