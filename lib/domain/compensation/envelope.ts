import { AppError } from "@/lib/errors";
import type { AccuracyClass, FamilyRules } from "./types";

/**
 * Error limits of OIML R 60 (2021). Loads m and errors in verification intervals v; a load cell's rated capacity is n·v.
 * Linearity, hysteresis and creep share this envelope: being inside here is a statement on temperature alone.
 */

/** Last load of the steps below the highest one, R 60-1 table 4. */
const STEP_ENDS: Record<AccuracyClass, readonly [number, number]> = {
  A: [50_000, 200_000],
  B: [5_000, 20_000],
  C: [500, 2_000],
  D: [50, 200],
};

/** The temperature step that the limit at minimum load is stated for, K: R 60-1, 5.6.1.3. */
const MINIMUM_LOAD_STEP_K: Record<AccuracyClass, number> = { A: 2, B: 5, C: 5, D: 5 };

type EnvelopeRules = Pick<FamilyRules, "accuracyClass" | "intervals" | "pLc">;

/**
 * Maximum permissible error at load m, in v, sign-free: p_LC·(0.5, 1, 1.5); a step's end belongs to the lower step.
 * Source: OIML R 60-1:2021, table 4.
 */
export function maximumPermissibleError(load: number, { accuracyClass, pLc }: EnvelopeRules): number {
  const [first, second] = STEP_ENDS[accuracyClass];
  return pLc * (load <= first ? 0.5 : load <= second ? 1 : 1.5);
}

/** The loads at which the envelope is tightest: the class's step ends below n, and n itself. */
export function decisiveLoads({ accuracyClass, intervals }: EnvelopeRules): number[] {
  return [...STEP_ENDS[accuracyClass].filter((end) => end < intervals), intervals];
}

/** Least mpe(m)/m: the largest relative span error that stays inside at every load. */
export function spanErrorLimit(rules: EnvelopeRules): number {
  return Math.min(...decisiveLoads(rules).map((load) => maximumPermissibleError(load, rules) / load));
}

/**
 * Share of the envelope that a relative span error uses where it uses most; ≤ 1 is inside.
 * @param spanError e = S·gain(d)/N − 1.
 */
export function spanRatio(spanError: number, rules: EnvelopeRules): number {
  return Math.max(
    ...decisiveLoads(rules).map((load) => (Math.abs(spanError) * load) / maximumPermissibleError(load, rules)),
  );
}

/** What a relative span error amounts to at one end of the envelope's steps; loads and errors in v. */
export interface StepEnd {
  load: number;
  error: number;
  /** Maximum permissible error, sign-free. */
  limit: number;
  ratio: number;
}

/** A relative span error at every load where the envelope is tightest: the class's step ends below n, and n. */
export function spanErrorAtStepEnds(spanError: number, rules: EnvelopeRules): StepEnd[] {
  return decisiveLoads(rules).map((load) => {
    const error = spanErrorInIntervals(spanError, load);
    const limit = maximumPermissibleError(load, rules);
    return { load, error, limit, ratio: Math.abs(error) / limit };
  });
}

/** Error in v at load m (in v) of a relative span error: what the envelope chart shows. */
export function spanErrorInIntervals(spanError: number, load: number): number {
  return spanError * load;
}

/** Largest change of the output at minimum load, relative to the span, 1/K: p_LC/(Tf·Y). Source: R 60-1, 5.6.1.3. */
export function zeroTcLimit({ accuracyClass, pLc, vMinRatioY }: FamilyRules): number {
  return pLc / (MINIMUM_LOAD_STEP_K[accuracyClass] * vMinRatioY);
}

/**
 * Share of the limit at minimum load that a change of the corrected unloaded output uses; ≤ 1 is inside.
 * Source: OIML R 60-1:2021, 5.6.1.3, and C_M of R 60-3:2021, 2.1.4, with the span taken as Emax − Emin.
 * @param changeMvV change of output, mV/V, over `changeK` ≠ 0.
 * @throws AppError `envelope.change_invalid` {changeMvV, changeK} where that is no finite share.
 */
export function zeroShiftRatio(changeMvV: number, changeK: number, family: FamilyRules): number {
  const { nominalMvV, vMinRatioY, accuracyClass, pLc } = family;
  const step = MINIMUM_LOAD_STEP_K[accuracyClass];
  const ratio = ((Math.abs(changeMvV) / nominalMvV) * vMinRatioY * step) / Math.abs(changeK) / pLc;
  if (!Number.isFinite(ratio)) throw new AppError("envelope.change_invalid", { changeMvV, changeK });
  return ratio;
}

/**
 * Pooling limit for gainTc, 1/K: the share of the envelope left to temperature, over the largest distance from the
 * reference inside the family's range.
 */
export function poolingLimit(family: FamilyRules): number {
  const { referenceC, temperatureMinC, temperatureMaxC, temperatureShare } = family;
  const reach = Math.max(Math.abs(temperatureMinC - referenceC), Math.abs(temperatureMaxC - referenceC));
  return (temperatureShare * spanErrorLimit(family)) / reach;
}

const FINITE = [
  "referenceC",
  "temperatureMinC",
  "temperatureMaxC",
  "minSoakMinutes",
  "minLoadFraction",
  "minTemperatureSpanK",
] as const;

/**
 * Refuses rules with which nothing can be computed.
 * @throws AppError `family.invalid` {field, value}.
 */
export function assertFamilyRules(family: FamilyRules): void {
  const positive = ["capacityKg", "nominalMvV", "intervals", "vMinRatioY", "pLc", "temperatureShare"] as const;
  const bad =
    positive.find((field) => !(family[field] > 0 && Number.isFinite(family[field]))) ??
    (["coverage", "confidence"] as const).find((field) => !(family[field] > 0 && family[field] < 1)) ??
    FINITE.find((field) => !Number.isFinite(family[field])) ??
    (family.temperatureMinC < family.temperatureMaxC ? undefined : "temperatureMaxC");
  if (bad) throw new AppError("family.invalid", { field: bad, value: family[bad] });
  if (!Object.hasOwn(STEP_ENDS, family.accuracyClass))
    throw new AppError("family.invalid", { field: "accuracyClass", value: family.accuracyClass });
}
