/** Maps a domain [from, to] of data onto pixels. */
export interface Scale {
  (value: number): number;
  domain: readonly [number, number];
}

export function linearScale(domain: readonly [number, number], range: readonly [number, number]): Scale {
  const [from, to] = domain;
  const span = to - from || 1;
  const scale = (value: number) => range[0] + ((value - from) / span) * (range[1] - range[0]);
  return Object.assign(scale, { domain });
}

/**
 * Round numbers inside a domain: steps of 1, 2 or 5 times a power of ten, about `count` of them.
 * @returns the ticks in rising order and how many decimals they need.
 */
export function niceTicks(domain: readonly [number, number], count: number): { values: number[]; digits: number } {
  const [from, to] = domain;
  if (!(to > from)) return { values: [from], digits: 2 };
  const rough = (to - from) / Math.max(1, count);
  const power = 10 ** Math.floor(Math.log10(rough));
  const factor = [1, 2, 5, 10].find((f) => f * power >= rough * (1 - 1e-9)) ?? 10;
  const step = factor * power;
  const first = Math.ceil(from / step - 1e-9);
  const last = Math.floor(to / step + 1e-9);
  const values = Array.from({ length: last - first + 1 }, (_, i) => (first + i) * step);
  return { values, digits: Math.max(0, -Math.floor(Math.log10(step) + 1e-9)) };
}

/** Lowest and highest of the values with a margin on both sides as a share of their span. */
export function domainOf(values: readonly number[], margin = 0.06): [number, number] {
  if (values.length === 0) return [0, 1];
  let low = Number.POSITIVE_INFINITY;
  let high = Number.NEGATIVE_INFINITY;
  for (const value of values) {
    if (value < low) low = value;
    if (value > high) high = value;
  }
  const pad = (high - low) * margin || Math.abs(high) * margin || 1;
  return [low - pad, high + pad];
}
