import { shareShown } from "@/lib/domain/compensation/share-shown";
import type { VerificationResult } from "@/lib/domain/compensation/types";
import { formatPercent } from "@/lib/domain/format/figure";
import { EVIDENCE_MAX, type PackageCheck, someSerials } from "./check";

/** A derivation whose values are packed, with what its verification devices showed. */
export interface VerifiedDerivation {
  id: string;
  method: "individual" | "pooled-gain" | "import";
  verification: readonly VerificationResult[];
}

interface Judged {
  words: string;
  good: boolean;
}

function judge({ method, verification }: VerifiedDerivation, confidence: number): Judged {
  const judged = verification.filter((one) => one.passed !== null);
  const failed = judged.filter((one) => one.passed === false).map((one) => one.serial);
  const count = judged.length;
  if (failed.length > 0)
    return {
      good: false,
      words: `${failed.length} of ${count} verification devices are outside the envelope (${someSerials(failed)}).`,
    };
  if (count > 0) {
    const share = formatPercent(shareShown(count, confidence), 1);
    const words = `${count} of ${count} verification devices passed: by itself that shows, with ${formatPercent(confidence)} confidence, only that at least ${share} of the lot would.`;
    return { good: true, words };
  }
  if (method === "individual")
    return { good: true, words: "Every device has its own readings; no verification device stands beside them." };
  if (method === "import")
    return { good: false, words: "Imported coefficients: no reading of this lot verifies them." };
  return {
    good: false,
    words: "No verification device was judged: the pooled gain coefficient is not proven outside the sample.",
  };
}

/** Whether the verification devices passed, and which share of the lot that shows. */
export function checkVerification(derivations: readonly VerifiedDerivation[], confidence: number): PackageCheck {
  const judged = derivations.map((one) => judge(one, confidence));
  return {
    code: "verification",
    verdict: judged.every((one) => one.good) ? "pass" : "warn",
    message: [...new Set(judged.map((one) => one.words))].join(" "),
    evidence: {
      confidence,
      derivations: derivations.map(({ id, verification }) => {
        const count = verification.filter((one) => one.passed !== null).length;
        const passed = verification.filter((one) => one.passed === true).length;
        return {
          derivation: id,
          judged: count,
          passed,
          shareShown: count > 0 && passed === count ? shareShown(count, confidence) : null,
          devices: verification.slice(0, EVIDENCE_MAX),
        };
      }),
    },
  };
}
