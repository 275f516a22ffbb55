import type { Finding, PooledResult, VerificationResult } from "./types";

/** What two results of a derivation, shown or previewed, are held against each other by. */
export interface ComparableResult {
  pooled?: Pick<PooledResult, "gainTc" | "sd" | "n" | "toleranceInterval" | "confidenceInterval" | "verdict"> | null;
  counts: { withValues: number; findings: Record<Finding["severity"], number> };
  findings: readonly (Pick<Finding, "code" | "severity" | "serial" | "point" | "message"> & { id: string })[];
  verification: readonly Pick<VerificationResult, "passed">[];
}

export interface DerivationEffect<F> {
  /** There only now. */
  gained: F[];
  /** There no more. */
  lost: F[];
  /** Both sides carried all their findings, so that nothing is missing in the two lists. */
  complete: boolean;
}

const keyOf = ({ code, serial, point }: Pick<Finding, "code" | "serial" | "point">) =>
  JSON.stringify([code, serial, point]);

function carriesAll({ counts, findings }: ComparableResult): boolean {
  const { hard, soft, note } = counts.findings;
  return findings.length >= hard + soft + note;
}

/**
 * Which findings a change of options brings and which it takes away. Findings are the same when code, device and point are:
 * their figures may differ.
 */
export function derivationEffect<R extends ComparableResult>(
  before: R,
  after: R,
): DerivationEffect<R["findings"][number]> {
  const old = new Set(before.findings.map(keyOf));
  const now = new Set(after.findings.map(keyOf));
  return {
    gained: after.findings.filter((finding) => !old.has(keyOf(finding))),
    lost: before.findings.filter((finding) => !now.has(keyOf(finding))),
    complete: carriesAll(before) && carriesAll(after),
  };
}
