import type { PooledResult } from "@/lib/domain/compensation/types";
import { formatPercent } from "@/lib/domain/format/figure";
import { formatQuantityWithUnit } from "@/lib/domain/format/quantity";
import type { PackageCheck } from "./check";

/** What a derivation whose values are packed says about the lot's gain coefficient. */
export interface PooledDerivation {
  id: string;
  pooled: PooledResult;
}

function sentence({ pooled }: PooledDerivation): string {
  const { sd, toleranceFactor, n, limit, coverage, confidence, verdict } = pooled;
  const mean = `Mean of gainTc over ${n} sample devices ${formatQuantityWithUnit("gainTc", pooled.gainTc)}`;
  if (verdict === "not-judged" || sd === null || toleranceFactor === null)
    return `${mean}; its spread could not be judged.`;
  const spread = formatQuantityWithUnit("gainTc", toleranceFactor * sd);
  const bound = formatQuantityWithUnit("gainTc", limit);
  const word = verdict === "inside" ? "inside" : "outside";
  return `${mean}; ${formatPercent(coverage)} of the lot is expected within ±${spread} (${formatPercent(confidence)} confidence), ${word} the limit ±${bound}.`;
}

/** Whether one gain coefficient may serve the lot: the sample's tolerance interval against the pooling limit. */
export function checkPooling(derivations: readonly PooledDerivation[]): PackageCheck {
  const inside = derivations.every(({ pooled }) => pooled.verdict === "inside");
  return {
    code: "pooling",
    verdict: inside ? "pass" : "warn",
    message:
      derivations.length === 0
        ? "No pooled gain coefficient is packed: every device has its own."
        : derivations.map(sentence).join(" "),
    evidence: {
      derivations: derivations.map(({ id, pooled }) => ({
        derivation: id,
        gainTc: pooled.gainTc,
        sd: pooled.sd,
        n: pooled.n,
        toleranceInterval: pooled.toleranceInterval,
        limit: pooled.limit,
        verdict: pooled.verdict,
      })),
    },
  };
}
