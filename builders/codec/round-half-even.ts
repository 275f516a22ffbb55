/**
 * Nearest integer, ties to the even one (IEEE 754 roundTiesToEven, to an integer).
 * Exact for every finite number: the fraction of a magnitude is computed without rounding.
 * @param x any finite number.
 * @returns an integer, never −0.
 */
export function roundHalfEven(x: number): number {
  const magnitude = Math.abs(x);
  const below = Math.floor(magnitude);
  const fraction = magnitude - below;
  const up = fraction > 0.5 || (fraction === 0.5 && below % 2 === 1);
  const rounded = up ? below + 1 : below;
  return x < 0 && rounded !== 0 ? -rounded : rounded;
}
