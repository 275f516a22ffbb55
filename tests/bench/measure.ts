/** Measuring on a machine that others use too: alternate what is compared, take medians, show the spread. */

export interface Spread {
  min: number;
  median: number;
  max: number;
}

/** @param values at least one. */
export function spreadOf(values: readonly number[]): Spread {
  const sorted = [...values].sort((a, b) => a - b);
  const middle = sorted.length / 2;
  const [low, high] = [sorted[Math.ceil(middle) - 1] as number, sorted[Math.floor(middle)] as number];
  return { min: sorted[0] as number, median: (low + high) / 2, max: sorted.at(-1) as number };
}

/** Minimum, median and maximum in one unit. */
export function spreadText({ min, median, max }: Spread, unit: string): string {
  return `min ${min.toPrecision(3)}, median ${median.toPrecision(3)}, max ${max.toPrecision(3)} ${unit}`;
}

/** Milliseconds that work takes by the clock. */
export async function wallMs(work: () => unknown): Promise<number> {
  const from = performance.now();
  await work();
  return performance.now() - from;
}

/** Seconds of CPU that this process spends on work, user and system, in all its threads. */
export async function cpuSeconds(work: () => unknown): Promise<number> {
  const from = process.cpuUsage();
  await work();
  const { user, system } = process.cpuUsage(from);
  return (user + system) / 1e6;
}
