import { AppError } from "@/lib/errors";
import { betaCdf } from "./distributions";
import { findRoot } from "./root";

function assertOpen(name: string, value: number): void {
  if (!(value > 0 && value < 1)) throw new AppError("share.invalid", { [name]: value });
}

/**
 * Share of a lot that is shown to pass when every one of `count` devices drawn at random passed: the largest share
 * under which that luck has a probability below 1 − confidence, (1 − confidence)^(1/count). No normal population is
 * assumed. 5 of 5 at 95 % show 54.9 %.
 * @throws AppError `share.invalid`.
 */
export function shareShown(count: number, confidence: number): number {
  assertOpen("confidence", confidence);
  if (!(Number.isInteger(count) && count >= 1)) throw new AppError("share.invalid", { count });
  return (1 - confidence) ** (1 / count);
}

/**
 * The same where some of the `count` devices failed: the exact one-sided lower bound of a binomial share, that is the
 * share p under which `passed` or more of `count` have the probability 1 − confidence.
 * Source: Clopper and Pearson, Biometrika 26 (1934), with the beta distribution for the binomial sum.
 * @returns 0 where none passed.
 * @throws AppError `share.invalid` unless 0 ≤ passed ≤ count and count ≥ 1.
 */
export function shareShownWithFailures(passed: number, count: number, confidence: number): number {
  if (!(Number.isInteger(passed) && passed >= 0 && passed <= count)) throw new AppError("share.invalid", { passed });
  if (passed === count) return shareShown(count, confidence);
  assertOpen("confidence", confidence);
  if (!Number.isInteger(count)) throw new AppError("share.invalid", { count });
  if (passed === 0) return 0;
  return findRoot((share) => betaCdf(share, passed, count - passed + 1) - (1 - confidence), 0, 1);
}

/**
 * How many devices have to pass, all of them, to show the share at the confidence: ln(1 − confidence) / ln(share),
 * rounded up.
 * @throws AppError `share.invalid`.
 */
export function devicesToShow(share: number, confidence: number): number {
  assertOpen("share", share);
  assertOpen("confidence", confidence);
  // A share that `shareShown` returns has to give the same count back in spite of rounding.
  return Math.max(1, Math.ceil(Math.log(1 - confidence) / Math.log(share) - 1e-9));
}
