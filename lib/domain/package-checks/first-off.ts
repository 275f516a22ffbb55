import { formatFigure } from "@/lib/domain/format/figure";
import type { FirstOffProof } from "@/lib/domain/proof/first-off";
import { devices, type PackageCheck } from "./check";

/**
 * Whether written devices of the lot computed with this layout and firmware as their images predict.
 * @returns null where no proof run judged one: nothing is known then, which is no pass. It is asked for at the first-off.
 */
export function checkFirstOff(proof: FirstOffProof | null): PackageCheck | null {
  if (proof === null || proof.state === "open") return null;
  const { layout, firmware, agreed, differed, worstRatio, shown, notShown } = proof;
  const largest = `Largest difference ${formatFigure(worstRatio)} of the limit.`;
  const what = `layout ${layout} and firmware ${firmware}`;
  const sentences =
    proof.state === "differs"
      ? [`${devices(differed)} of ${agreed + differed} read with ${what} did otherwise than predicted.`, largest]
      : [
          `${devices(agreed)} read with ${what} did as predicted.`,
          largest,
          `Shown to be applied: ${shown.join(", ") || "nothing"}${notShown.length > 0 ? `; not shown: ${notShown.join(", ")}` : ""}.`,
        ];
  return {
    code: "first-off",
    verdict: proof.state === "differs" ? "warn" : "pass",
    message: sentences.join(" "),
    evidence: { ...proof },
  };
}
