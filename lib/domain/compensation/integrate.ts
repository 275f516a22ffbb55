/** Nodes on (−1, 1) and weights of the Gauss–Legendre rule. */
interface Rule {
  nodes: number[];
  weights: number[];
}

/**
 * Gauss–Legendre rule by Newton's method on the Legendre polynomial (Abramowitz and Stegun 25.4.29).
 * @param n number of nodes.
 */
export function gaussLegendre(n: number): Rule {
  const nodes: number[] = [];
  const weights: number[] = [];
  for (let i = 0; i < n; i++) {
    let x = Math.cos((Math.PI * (i + 0.75)) / (n + 0.5));
    let slope = 1;
    for (let step = 0; step < 50; step++) {
      let before = 1;
      let value = x;
      for (let k = 2; k <= n; k++) [before, value] = [value, ((2 * k - 1) * x * value - (k - 1) * before) / k];
      slope = (n * (x * value - before)) / (x * x - 1);
      const move = value / slope;
      x -= move;
      if (Math.abs(move) < 1e-16) break;
    }
    nodes.push(x);
    weights.push(2 / ((1 - x * x) * slope * slope));
  }
  return { nodes, weights };
}

const RULE = gaussLegendre(16);

/** Nodes and weights of the 16-point rule laid over `panels` equal parts of [low, high]. */
export function panelNodes(low: number, high: number, panels: number): { x: number; weight: number }[] {
  const half = (high - low) / panels / 2;
  const placed: { x: number; weight: number }[] = [];
  for (let panel = 0; panel < panels; panel++) {
    const middle = low + half * (2 * panel + 1);
    RULE.nodes.forEach((node, i) => {
      placed.push({ x: middle + half * node, weight: half * (RULE.weights[i] as number) });
    });
  }
  return placed;
}
