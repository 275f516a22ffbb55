import type { CoefficientValues } from "@/builders/codec/sources";
import { type Twin, twinOutput } from "@/builders/codec/twin/twin";
import { maximumPermissibleError } from "@/lib/domain/compensation/envelope";
import type { FamilyRules } from "@/lib/domain/compensation/types";

/**
 * Share of the error limit that output and prediction may differ by: a reference may use a third of the limit of what
 * it judges (OIML R 76-1:2006, 3.7.1 for test weights, from memory; applied to the prediction it is common practice, no source).
 */
export const PROOF_SHARE = 1 / 3;

/** One reading of a written device: uncompensated signal and compensated output taken together, both in mV/V. */
export interface ProofReading {
  /** Line of the file. */
  row: number;
  point: number;
  chamberC: number;
  /** In the device's own unit. */
  deviceTemp: number;
  loadKg: number;
  signalMvV: number;
  outputMvV: number;
}

export interface ProofRow extends ProofReading {
  /** What the decoded image makes of signal and temperature. */
  predictedMvV: number;
  /** Output less prediction, in verification intervals v. */
  differenceIntervals: number;
  limitIntervals: number;
  /** Share of the limit used; ≤ 1 agrees. */
  ratio: number;
}

/** Coefficients whose being applied a proof can show; the thermometer's stand behind those over temperature. */
export type ProvableCoefficient = "zero" | "zeroTc" | "zeroTc2" | "gain" | "gainTc" | "gainTc2";

/** Whether the readings would have told, had the firmware left one coefficient out. */
export interface ShownCoefficient {
  name: ProvableCoefficient;
  /** Largest change of the prediction without it, as a share of the limit. */
  effectRatio: number;
  shown: boolean;
}

export interface ProofJudgement {
  /** In the order of the readings. */
  rows: ProofRow[];
  worst: ProofRow;
  agrees: boolean;
  shown: ShownCoefficient[];
}

/** What a coefficient is when it does nothing. */
const NEUTRAL: Readonly<Record<ProvableCoefficient, number>> = {
  zero: 0,
  zeroTc: 0,
  zeroTc2: 0,
  gain: 1,
  gainTc: 0,
  gainTc2: 0,
};

/** In v. A load written as the very end of a step belongs to it, whatever its last binary digit. */
const loadOf = (loadKg: number, { capacityKg, intervals }: FamilyRules) =>
  ((loadKg * intervals) / capacityKg) * (1 - 1e-12);

function without(twin: Twin, name: ProvableCoefficient): Twin {
  const coefficients: CoefficientValues = { ...twin.coefficients, [name]: NEUTRAL[name] };
  return { ...twin, coefficients };
}

/**
 * Holds the compensated output of one written device against what its image predicts from the signal read beside it.
 * The signal cancels out, so that what is left is whether the firmware computes with these bytes as the layout says.
 * What the readings could not have shown is told apart: at the reference temperature alone no temperature coefficient is.
 * @param readings at least one, all of one device.
 * @param twin of the image that the device carried when it was read.
 */
export function judgeProof(twin: Twin, readings: readonly ProofReading[], family: FamilyRules): ProofJudgement {
  const perMvV = family.intervals / family.nominalMvV;
  const limitOf = (reading: ProofReading) =>
    PROOF_SHARE * maximumPermissibleError(loadOf(reading.loadKg, family), family);
  const rows = readings.map((reading): ProofRow => {
    const predictedMvV = twinOutput(twin, reading.signalMvV, reading.deviceTemp);
    const differenceIntervals = (reading.outputMvV - predictedMvV) * perMvV;
    const limitIntervals = limitOf(reading);
    const ratio = Math.abs(differenceIntervals) / limitIntervals;
    return { ...reading, predictedMvV, differenceIntervals, limitIntervals, ratio };
  });
  const worst = rows.reduce((most, row) => (row.ratio > most.ratio ? row : most));
  const names = (Object.keys(NEUTRAL) as ProvableCoefficient[]).filter((name) => twin.coefficients[name] !== null);
  const shown = names.map((name): ShownCoefficient => {
    const other = without(twin, name);
    const effects = rows.map((row) => {
      const change = (twinOutput(other, row.signalMvV, row.deviceTemp) - row.predictedMvV) * perMvV;
      return Math.abs(change) / row.limitIntervals;
    });
    const effectRatio = Math.max(...effects);
    // Twice the limit: output and limit can then not both agree with the prediction and with the one without it.
    return { name, effectRatio, shown: effectRatio > 2 };
  });
  return { rows, worst, agrees: worst.ratio <= 1, shown };
}
