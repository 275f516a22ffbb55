/** What the certificate of a run's equipment says, as of the day of the run. */
export interface RunCertificate {
  runId: string;
  code: string;
  kind: string;
  /** Expanded uncertainty: K for sensor and chamber, kg for load, mV/V for reader. */
  uncertainty: number;
  coverageFactor: number;
  /** Of a chamber: the temperature at each place less that at the reference sensor, K, with its expanded uncertainty. */
  positions: readonly { position: string; deviationK: number; uncertaintyK: number }[];
}

/** The certificates of one kind, taken together. */
export interface CertifiedKind {
  /** Root mean square of the expanded uncertainties. */
  expanded: number;
  standard: number;
  /** Codes, each once. */
  codes: string[];
  /** Runs of the derivation that name none of this kind. */
  runsWithout: number;
  /** Whether all runs name the same pieces. */
  same: boolean;
}

function rootMeanSquare(values: readonly number[]): number {
  return Math.sqrt(values.reduce((sum, value) => sum + value * value, 0) / values.length);
}

/** Undefined where no run names a piece of this kind. */
export function certifiedKind(
  kind: string,
  runIds: readonly string[],
  certificates: readonly RunCertificate[],
): CertifiedKind | undefined {
  const used = certificates.filter((one) => one.kind === kind && runIds.includes(one.runId));
  if (used.length === 0) return undefined;
  const byRun = runIds.map((runId) => used.filter((one) => one.runId === runId).map((one) => one.code));
  const named = new Set(byRun.map((codes) => [...codes].sort().join(",")));
  return {
    expanded: rootMeanSquare(used.map((one) => one.uncertainty)),
    standard: rootMeanSquare(used.map((one) => one.uncertainty / one.coverageFactor)),
    codes: [...new Set(used.map((one) => one.code))].sort(),
    runsWithout: byRun.filter((codes) => codes.length === 0).length,
    same: named.size === 1,
  };
}

/**
 * Variance of a chamber's temperature at a place against its reference sensor, K²: the certified deviation, which
 * readings are not corrected for, counts as an error of its size, together with its own uncertainty. A place that the
 * certificate does not name gets the mean over those it does; a chamber without places its overall uncertainty.
 */
export function chamberVariance(chamber: RunCertificate, position: string | null): number {
  const { positions, coverageFactor, uncertainty } = chamber;
  const variance = (place: { deviationK: number; uncertaintyK: number }) =>
    place.deviationK ** 2 + (place.uncertaintyK / coverageFactor) ** 2;
  const named = positions.find((place) => place.position === position);
  if (named) return variance(named);
  if (positions.length > 0) return positions.reduce((sum, place) => sum + variance(place), 0) / positions.length;
  return (uncertainty / coverageFactor) ** 2;
}
