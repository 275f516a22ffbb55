import { AppError } from "@/lib/errors";

/**
 * The x in [low, high] where an increasing or decreasing continuous function crosses zero: false position with the
 * Illinois halving, and a bisection whenever that stalls.
 * @param low, high finite bounds with values of opposite sign (or zero).
 * @param precision relative size of the last step: coarser where each value of f is costly.
 * @returns x to about that precision.
 * @throws AppError `root.not_bracketed` {low, high}.
 */
export function findRoot(f: (x: number) => number, low: number, high: number, precision = 4e-16): number {
  let a = low;
  let b = high;
  let fa = f(a);
  let fb = f(b);
  if (fa === 0) return a;
  if (fb === 0) return b;
  // Signs, not products: these may be too small for a double.
  if (!(Math.sign(fa) * Math.sign(fb) < 0)) throw new AppError("root.not_bracketed", { low, high });
  for (let step = 0; step < 200; step++) {
    const bisect = step % 3 === 2;
    let x = bisect ? (a + b) / 2 : b - (fb * (b - a)) / (fb - fa);
    if (!(x > Math.min(a, b) && x < Math.max(a, b))) x = (a + b) / 2;
    if (x === a || x === b || Math.abs(b - a) <= precision * Math.abs(x)) return x;
    // A small step of the secant means a small value of f; half a bracket's step means nothing.
    const isLast = !bisect && Math.abs(x - b) <= precision * Math.abs(x);
    const fx = f(x);
    if (fx === 0 || isLast) return x;
    if (Number.isNaN(fx)) throw new AppError("root.not_bracketed", { low, high });
    if (Math.sign(fx) !== Math.sign(fb)) {
      a = b;
      fa = fb;
    } else {
      fa /= 2;
    }
    b = x;
    fb = fx;
  }
  return b;
}
