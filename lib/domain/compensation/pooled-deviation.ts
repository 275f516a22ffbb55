/** A sample's standard deviation and its size. */
export interface Deviation {
  /** Sample standard deviation with n − 1. */
  sd: number;
  /** ≥ 2 */
  n: number;
}

/**
 * Standard deviation that several samples share, √(Σ(n−1)·s² / Σ(n−1)), with Σ(n−1) degrees of freedom: the pooled estimate
 * of a variance of JCGM 100:2008, 4.2.4. Their means may differ.
 * @returns null where no sample has a degree of freedom.
 */
export function poolDeviations(samples: readonly Deviation[]): { sd: number; freedom: number } | null {
  let squares = 0;
  let freedom = 0;
  for (const { sd, n } of samples) {
    squares += (n - 1) * sd * sd;
    freedom += n - 1;
  }
  return freedom > 0 ? { sd: Math.sqrt(squares / freedom), freedom } : null;
}
