import { formatCount } from "@/lib/domain/format/figure";
import { LEFT_OUT_REASONS, type LeftOutReason } from "@/lib/domain/package-selection";
import { devices, type PackageCheck, serialEvidence, someSerials } from "./check";

export interface CoverageFacts {
  /** How many devices the lot has. */
  lotDevices: number;
  packed: number;
  leftOut: readonly { serial: string; reason: LeftOutReason }[];
  /** Packed with an approved set while a newer one waits for a decision. */
  newerUndecided: readonly string[];
  /** Packed although another board is reported in them than the one that was measured. */
  otherBoard: readonly string[];
}

const WORDS: Record<LeftOutReason, string> = {
  scrapped: "scrapped",
  held: "held",
  excluded: "excluded from the derivation",
  "no-coefficients": "without coefficients",
  undecided: "with coefficients still to be decided",
  refused: "with refused coefficients only",
  stale: "with stale coefficients",
  revoked: "with revoked coefficients",
  "other-order": "with coefficients of another order than the layout's",
  "other-revision": "with coefficients of another family revision than the lot's",
};

/** Whether every device of the lot is in the package with the newest that is known about it. */
export function checkCoverage(facts: CoverageFacts): PackageCheck {
  const { lotDevices, packed, leftOut, newerUndecided, otherBoard } = facts;
  const byReason = LEFT_OUT_REASONS.flatMap((reason) => {
    const serials = leftOut.filter((one) => one.reason === reason).map((one) => one.serial);
    return serials.length > 0 ? [{ reason, ...serialEvidence(serials) }] : [];
  });
  const sentences = [
    leftOut.length === 0
      ? `All ${devices(lotDevices)} of the lot are packed.`
      : `${formatCount(packed)} of ${devices(lotDevices)} are packed. Left out: ${byReason
          .map(
            ({ reason, count, serials }) => `${formatCount(count)} ${WORDS[reason]} (${someSerials(serials, count)})`,
          )
          .join("; ")}.`,
  ];
  if (newerUndecided.length > 0)
    sentences.push(
      `${devices(newerUndecided.length)} carry approved coefficients while newer ones wait for a decision (${someSerials(newerUndecided)}).`,
    );
  if (otherBoard.length > 0)
    sentences.push(
      `In ${devices(otherBoard.length)} another board is reported than the one that was measured (${someSerials(otherBoard)}).`,
    );
  const whole = leftOut.length + newerUndecided.length + otherBoard.length === 0;
  return {
    code: "coverage",
    verdict: whole ? "pass" : "warn",
    message: sentences.join(" "),
    evidence: {
      lotDevices,
      packed,
      leftOut: byReason,
      newerUndecided: serialEvidence(newerUndecided),
      otherBoard: serialEvidence(otherBoard),
    },
  };
}
