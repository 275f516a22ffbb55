import { AppError } from "@/lib/errors";

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
 * How many devices have to pass, all of them, to show the share at the confidence.
 * @throws AppError `share.invalid`.
 */
export function devicesToShow(share: number, confidence: number): number {
  assertOpen("share", share);
  assertOpen("confidence", confidence);
  // A share that `shareShown` returns has to give the same count back in spite of rounding.
  return Math.max(1, Math.ceil(Math.log(1 - confidence) / Math.log(share) - 1e-9));
}
