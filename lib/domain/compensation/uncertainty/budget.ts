import { selectRuns } from "../run-selection";
import type { DerivationInput, DerivationResult } from "../types";
import { type BudgetGround, budgetLines } from "./budget-lines";
import type { BudgetEnd, BudgetLine, ChamberStatement, Effects, UncertaintyBudget } from "./budget-types";
import { certifiedKind, type RunCertificate } from "./certificates";
import { COVERAGE_LEVEL, type Combined, combine } from "./combine";
import { type LotEffects, lotEffects } from "./lot-effects";
import { surveyRepeats } from "./repeats";

const FORMULA =
  "u² = Σ uᵢ² over the lines known, uᵢ = standard uncertainty × sensitivity (root mean square over the devices); " +
  "ν = u⁴ / Σ (uᵢ⁴/νᵢ); U = k·u, k = t(95.45 %, ν) (JCGM 100:2008, 5.1.2 and G.4)";

const QUANTITIES = ["gainTc", "zeroTc", "intervals"] as const;
type Quantity = (typeof QUANTITIES)[number];

function combineLines(lines: readonly BudgetLine[], quantity: Quantity): Combined | undefined {
  const counted = lines.filter((line) => !(quantity === "gainTc" && line.within !== null));
  return combine(
    counted.flatMap((line) => {
      const standard = line[quantity];
      return standard === null ? [] : [{ standard, df: line.df }];
    }),
  );
}

function effectsOf(sums: Record<Quantity, Combined | undefined>, member: keyof Combined): Effects {
  const { gainTc, zeroTc, intervals } = sums;
  return {
    gainTc: gainTc?.[member] ?? null,
    zeroTc: zeroTc?.[member] ?? null,
    intervals: intervals?.[member] ?? null,
  };
}

function shown(value: number): string {
  return value === 0 ? "0" : String(Number(value.toPrecision(2)));
}

function chamberStatement(ground: BudgetGround, { pairs }: LotEffects, atC: number | null): ChamberStatement {
  const { end, lot } = ground;
  const cancels =
    "An individual trim keeps nothing of an error of the chamber's temperature, whatever its size: the device's " +
    "thermometer, its zero and its gain are read on the same wrong scale, and corrected on it.";
  const judged = end !== null && atC !== null && lot.outputDevices > 0;
  if (!judged)
    return {
      individual: 0,
      pooled: null,
      perKelvin: null,
      words: `${cancels} On a pooled gain nothing can be said here.`,
    };
  const perKelvin = Math.sqrt(pairs.chamberPooledPerKelvin[end]);
  const pooled = lot.chamberVarianceK2 === null ? null : Math.sqrt(pairs.chamberPooledByPlace[end]);
  const leaves =
    ` A pooled gain is another scale's: for each kelvin by which the error differs between the lowest and the highest ` +
    `temperature, ${shown(perKelvin)} v stay at ${Number(atC.toFixed(1))} °C and capacity`;
  const known =
    pooled === null
      ? "; the runs name no chamber, so how large it is stays open."
      : `; for this chamber ${shown(pooled)} v (standard uncertainty).`;
  return { individual: 0, pooled, perKelvin, words: cancels + leaves + known };
}

function endsOf(groundAt: (end: 0 | 1) => BudgetGround, range: readonly [number, number]): BudgetEnd[] {
  return ([0, 1] as const).flatMap((end) => {
    const sum = combineLines(budgetLines(groundAt(end)), "intervals");
    if (!sum) return [];
    const { standard: combined, coverageFactor, expanded } = sum;
    return [{ temperatureC: range[end], combined, coverageFactor, expanded }];
  });
}

/**
 * Uncertainty budget of a derivation: what repeatability, reference sensor, chamber uniformity, load, reader, zero
 * return and device thermometer do to gainTc, to zeroTc and to the output at capacity at the ends of the proven range.
 * Sensitivities are the exact first derivatives of the least squares of the contract's section 3; their root mean square
 * is taken over the sample and at most a thousand other devices, so that the budget speaks of a typical device. With a pooled gain, gainTc is the mean of the
 * sample, and what differs from device to device is in the sample's scatter, shown but not added a second time.
 * What can't be known is null with the reason, and named in `missing`; what does not enter by the algebra is 0.
 * Source: JCGM 100:2008 (GUM); the algebra is derived in the docstrings of `device-effects.ts`.
 * @param result of `derive(input)`. @param certificates as of the runs; those of runs not used are passed over.
 */
export function uncertaintyBudget(
  input: DerivationInput,
  result: DerivationResult,
  certificates: readonly RunCertificate[],
): UncertaintyBudget {
  const { family, method, order } = input;
  const { used } = selectRuns(input.runs);
  const range = result.provenRange;
  const ends: [number, number] = range ? [range[0] - family.referenceC, range[1] - family.referenceC] : [0, 0];
  const repeats = surveyRepeats(used, family.capacityKg);
  const lot = lotEffects(result.devices, repeats.designOf, { family, order, method, ends }, certificates);
  const runIds = used.map((run) => run.id);
  const kind = (name: string) => certifiedKind(name, runIds, certificates);
  const certified = { sensor: kind("sensor"), chamber: kind("chamber"), load: kind("load"), reader: kind("reader") };
  const groundAt = (end: 0 | 1 | null): BudgetGround => {
    return { family, method, pooled: result.pooled, lot, repeats, certified, end };
  };
  const atEnds = range ? endsOf(groundAt, range) : [];
  const worse = range ? ((atEnds[1]?.combined ?? 0) >= (atEnds[0]?.combined ?? 0) ? 1 : 0) : null;
  const lines = budgetLines(groundAt(worse));
  const sums = {
    gainTc: combineLines(lines, "gainTc"),
    zeroTc: combineLines(lines, "zeroTc"),
    intervals: combineLines(lines, "intervals"),
  };
  const atC = range && worse !== null ? range[worse] : null;
  return {
    formula: FORMULA,
    level: COVERAGE_LEVEL,
    atC,
    lines,
    combined: effectsOf(sums, "standard"),
    degreesOfFreedom: effectsOf(sums, "degreesOfFreedom"),
    coverageFactor: effectsOf(sums, "coverageFactor"),
    expanded: effectsOf(sums, "expanded"),
    ends: atEnds,
    missing: lines.filter((line) => line.standard === null).map((line) => line.source),
    chamber: chamberStatement(groundAt(worse), lot, atC),
  };
}
