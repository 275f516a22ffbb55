import { forEachInSteps, mapInSteps, type Steps } from "@/lib/domain/steps";
import { GAIN_FROM_ONE } from "./device-gain";
import { FindingGatherer } from "./finding-gatherer";
import { makeFinding } from "./findings";
import { medianOf } from "./outliers";
import { checkSiblingsInSteps } from "./sibling-checks";
import type { Coefficients, FamilyRules, Finding, PooledResult } from "./types";

export interface ImportedSet {
  serial: string;
  coefficients: Coefficients;
}

/** What readings of the lot gave before, to compare with. */
export interface DerivedBefore {
  values: ReadonlyMap<string, Coefficients>;
  pooled: PooledResult | null;
}

/** A change of the output beyond this share over the range is none that a load cell has (common practice, no source). */
const SHARE_MAX = 0.1;
/** A value whose effect is below this, v, has no sign to speak of. */
const SLIGHT_V = 0.1;

const TCS = ["gainTc", "zeroTc"] as const;
type Tc = (typeof TCS)[number];

/** Largest distance from the reference inside the family's range, K. */
function reachOf({ referenceC, temperatureMinC, temperatureMaxC }: FamilyRules): number {
  return Math.max(Math.abs(temperatureMinC - referenceC), Math.abs(temperatureMaxC - referenceC));
}

/** Share of the nominal output that a coefficient of temperature changes over the family's range. */
function shareOf(coefficient: Tc, value: number, family: FamilyRules): number {
  const relative = coefficient === "gainTc" ? value : value / family.nominalMvV;
  return Math.abs(relative) * reachOf(family);
}

function* unitFindings(sets: readonly ImportedSet[], family: FamilyRules): Steps<Finding[]> {
  const gatherers = TCS.map((coefficient) => ({ coefficient, found: new FindingGatherer() }));
  for (const { coefficient, found } of gatherers) {
    yield* forEachInSteps(sets, ({ serial, coefficients }) => {
      const value = coefficients[coefficient];
      const share = shareOf(coefficient, value, family);
      if (share > SHARE_MAX)
        found.add("import.unit_suspect", serial, null, share, { coefficient, value, percent: share * 100 });
    });
  }
  return gatherers.flatMap(({ found }) => found.list());
}

/**
 * gainTc is the correction and zeroTc the drift; other programs hold gain's effect or zero's correction, which differ by
 * their sign. Device by device against what readings gave; a gainTc without one against the median of those.
 */
function* oppositeFindings(
  sets: readonly ImportedSet[],
  derived: DerivedBefore,
  family: FamilyRules,
): Steps<Finding[]> {
  if (derived.values.size === 0) return [];
  const usual = medianOf([...derived.values.values()].map(({ gainTc }) => gainTc));
  const findings: Finding[] = [];
  for (const coefficient of TCS) {
    const counts = (value: number) => shareOf(coefficient, value, family) * family.intervals >= SLIGHT_V;
    let compared = 0;
    let opposite = 0;
    yield* forEachInSteps(sets, ({ serial, coefficients }) => {
      const known = derived.values.get(serial)?.[coefficient] ?? (coefficient === "gainTc" ? usual : undefined);
      const value = coefficients[coefficient];
      if (known === undefined || !counts(known) || !counts(value)) return;
      compared++;
      if (Math.sign(value) !== Math.sign(known)) opposite++;
    });
    if (opposite * 2 <= compared) continue;
    findings.push(makeFinding("import.sign_opposite", { data: { coefficient, opposite, compared } }));
  }
  return findings;
}

/** Where the lot has no readings to compare with, the trade's rule is worth a note: modulus falls with temperature. */
function* unusualFindings(sets: readonly ImportedSet[], family: FamilyRules): Steps<Finding[]> {
  let told = 0;
  let positive = 0;
  yield* forEachInSteps(sets, ({ coefficients: { gainTc } }) => {
    if (shareOf("gainTc", gainTc, family) * family.intervals < SLIGHT_V) return;
    told++;
    if (gainTc > 0) positive++;
  });
  if (positive * 2 <= told) return [];
  return [makeFinding("import.sign_unusual", { data: { positive, compared: told } })];
}

function* limitFindings(sets: readonly ImportedSet[], pooled: PooledResult | null): Steps<Finding[]> {
  const found = new FindingGatherer();
  if (!pooled) return [];
  const { gainTc: mean, limit } = pooled;
  yield* forEachInSteps(sets, ({ serial, coefficients: { gainTc } }) => {
    const away = Math.abs(gainTc - mean);
    if (away > limit * (1 + 1e-12)) found.add("import.beyond_limit", serial, null, away, { gainTc, mean, limit });
  });
  return found.list();
}

function* gainFindings(sets: readonly ImportedSet[]): Steps<Finding[]> {
  const found = new FindingGatherer();
  yield* forEachInSteps(sets, ({ serial, coefficients: { gain } }) => {
    const away = Math.abs(gain - 1);
    if (away > GAIN_FROM_ONE) found.add("gain.far_from_nominal", serial, null, away, { gain });
  });
  return found.list();
}

/** Outliers, signs and thermometers among the imported sets, as among derived ones, over the family's range. */
function* siblingFindings(sets: readonly ImportedSet[], family: FamilyRules): Steps<Finding[]> {
  const { temperatureMinC, temperatureMaxC } = family;
  const siblings = yield* mapInSteps(sets, ({ serial, coefficients }) => ({
    serial,
    coefficients,
    individual: coefficients,
    gainFrom: "own-points" as const,
    measuredRangeC: [temperatureMinC, temperatureMaxC] as [number, number],
    findings: [] as Finding[],
  }));
  const ofLot = yield* checkSiblingsInSteps(siblings, siblings, false, family);
  return [...ofLot, ...siblings.flatMap((one) => one.findings)];
}

/**
 * What to know about coefficients that were found elsewhere: the findings on derived ones that need no readings, and what
 * only an import can have wrong, units and signs.
 * @param derived of the lot's newest derivation from readings; null where there is none.
 */
export function* listImportFindings(
  sets: readonly ImportedSet[],
  family: FamilyRules,
  derived: DerivedBefore | null,
): Steps<Finding[]> {
  return [
    makeFinding("import.not_measured"),
    ...(yield* unitFindings(sets, family)),
    ...(yield* derived ? oppositeFindings(sets, derived, family) : unusualFindings(sets, family)),
    ...(yield* limitFindings(sets, derived?.pooled ?? null)),
    ...(yield* gainFindings(sets)),
    ...(yield* siblingFindings(sets, family)),
  ];
}
