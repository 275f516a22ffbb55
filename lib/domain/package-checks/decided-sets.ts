import { formatCount } from "@/lib/domain/format/figure";
import { devices, type PackageCheck, serialEvidence, someSerials } from "./check";

export interface DecidedSetsFacts {
  packed: number;
  /** Packed with a set that is not approved any more: must be none. */
  notApproved: readonly { serial: string; state: string }[];
  /** Packed with an approved set while a newer one waits for a decision. */
  newerUndecided: readonly string[];
  /** Left out with a newest set that is undecided, refused, stale or revoked. */
  leftOut: readonly { serial: string; reason: string }[];
}

const REASONS = ["undecided", "refused", "stale", "revoked"] as const;

/** Whether every packed set is approved now. What is left out for its set, and what waits, is told here and warned of in coverage. */
export function checkDecidedSets({ packed, notApproved, newerUndecided, leftOut }: DecidedSetsFacts): PackageCheck {
  const byReason = REASONS.map((reason) => ({
    reason,
    ...serialEvidence(leftOut.filter((one) => one.reason === reason).map((one) => one.serial)),
  })).filter((one) => one.count > 0);
  const sentences = [
    notApproved.length === 0
      ? `The coefficients of ${devices(packed)} are approved.`
      : `${formatCount(notApproved.length)} of ${devices(packed)} carry coefficients that are not approved (${someSerials(notApproved.map((one) => one.serial))}).`,
  ];
  if (newerUndecided.length > 0)
    sentences.push(
      `Newer ones of ${devices(newerUndecided.length)} wait for a decision (${someSerials(newerUndecided)}).`,
    );
  for (const { reason, count, serials } of byReason)
    sentences.push(`Left out: ${formatCount(count)} ${reason} (${someSerials(serials, count)}).`);
  return {
    code: "decided-sets",
    verdict: notApproved.length > 0 ? "fail" : "pass",
    message: sentences.join(" "),
    evidence: {
      devices: packed,
      notApproved: serialEvidence(notApproved.map((one) => one.serial)),
      newerUndecided: serialEvidence(newerUndecided),
      leftOut: byReason,
    },
  };
}
