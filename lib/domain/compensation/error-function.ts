/**
 * Coefficients of rational approximations, highest power first, each the double nearest to the published one.
 * Source: W. J. Cody, Rational Chebyshev Approximations for the Error Function, Math. Comp. 23 (1969).
 */
const NEAR = {
  top: [0.18577770618460315, 3.1611237438705655, 113.86415415105016, 377.485237685302, 3209.3775891384694],
  bottom: [1, 23.601290952344122, 244.02463793444417, 1282.6165260773723, 2844.236833439171],
};
const MIDDLE = {
  top: [
    2.1531153547440383e-8, 0.5641884969886701, 8.883149794388377, 66.11919063714163, 298.6351381974001,
    881.952221241769, 1712.0476126340707, 2051.0783778260716, 1230.3393547979972,
  ],
  bottom: [
    1, 15.744926110709835, 117.6939508913125, 537.1811018620099, 1621.3895745666903, 3290.7992357334597,
    4362.619090143247, 3439.3676741437216, 1230.3393548037495,
  ],
};
const FAR = {
  top: [
    0.016315387137302097, 0.30532663496123236, 0.36034489994980445, 0.12578172611122926, 0.016083785148742275,
    0.0006587491615298378,
  ],
  bottom: [1, 2.568520192289822, 1.8729528499234604, 0.5279051029514285, 0.06051834131244132, 0.0023352049762686918],
};

function ratio({ top, bottom }: { top: readonly number[]; bottom: readonly number[] }, x: number): number {
  let above = 0;
  let below = 0;
  for (let i = 0; i < top.length; i++) {
    above = above * x + (top[i] as number);
    below = below * x + (bottom[i] as number);
  }
  return above / below;
}

/** exp(−y²): the square is split, so that its rounding does not come out of the exponential magnified. */
function expMinusSquare(y: number): number {
  const coarse = Math.trunc(y * 16) / 16;
  return Math.exp(-coarse * coarse) * Math.exp(-(y - coarse) * (y + coarse));
}

/**
 * Complementary error function 1 − erf(x), to about 1e-15 relative, in the far tail too.
 * @param x any number but NaN; below 1e-308 the answer is 0.
 */
export function complementaryError(x: number): number {
  const y = Math.abs(x);
  if (y <= 0.46875) return 1 - x * ratio(NEAR, x * x);
  if (y > 27) return x < 0 ? 2 : 0;
  const tail =
    y <= 4
      ? expMinusSquare(y) * ratio(MIDDLE, y)
      : (expMinusSquare(y) / y) * (1 / Math.sqrt(Math.PI) - ratio(FAR, 1 / (y * y)) / (y * y));
  return x < 0 ? 2 - tail : tail;
}
