/** Numbers that look random and are the same at every run: the demo's drift comes from a stated seed. */
export interface Random {
  /** Uniform in [0, 1). */
  uniform(): number;
  /** Normal, by the polar method of Box and Muller. */
  normal(mean: number, standardDeviation: number): number;
}

/**
 * A generator of 32-bit state (a Weyl sequence through a multiply-and-shift mix): good enough for demo data, for nothing else.
 * @param seed any integer; the same seed gives the same numbers on every machine.
 */
export function seededRandom(seed: number): Random {
  let state = seed >>> 0;
  const uniform = () => {
    state = (state + 0x9e3779b9) >>> 0;
    let mixed = state;
    mixed = Math.imul(mixed ^ (mixed >>> 16), 0x85ebca6b);
    mixed = Math.imul(mixed ^ (mixed >>> 13), 0xc2b2ae35);
    return ((mixed ^ (mixed >>> 16)) >>> 0) / 2 ** 32;
  };
  const normal = (mean: number, standardDeviation: number): number => {
    for (;;) {
      const [u, v] = [2 * uniform() - 1, 2 * uniform() - 1];
      const s = u * u + v * v;
      if (s > 0 && s < 1) return mean + standardDeviation * u * Math.sqrt((-2 * Math.log(s)) / s);
    }
  };
  return { uniform, normal };
}
