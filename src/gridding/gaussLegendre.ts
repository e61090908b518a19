import { cos } from '../elementary/elementary.ts';

/**
 * Nodes and weights of the n-point Gauss–Legendre rule on [0, 1], n from 1 to 32. Newton's method on the Legendre
 * polynomial from Tricomi's starting values (Abramowitz & Stegun 25.4.29, from memory).
 */
export function gaussLegendre(n: number): { readonly nodes: Float64Array; readonly weights: Float64Array } {
  const known = rules[n];
  if (known) return known;
  const nodes = new Float64Array(n);
  const weights = new Float64Array(n);
  for (let m = 0; m < n; m++) {
    let x = -cos((Math.PI * (m + 0.75)) / (n + 0.5));
    let slope = 1;
    for (let round = 0; round < 6; round++) {
      let p = 1;
      let below = 0;
      for (let k = 1; k <= n; k++) [p, below] = [((2 * k - 1) * x * p - (k - 1) * below) / k, p];
      slope = (n * (x * p - below)) / (x * x - 1);
      x -= p / slope;
    }
    nodes[m] = (1 + x) / 2;
    weights[m] = 1 / ((1 - x * x) * slope * slope);
  }
  rules[n] = { nodes, weights };
  return rules[n];
}

const rules: { nodes: Float64Array; weights: Float64Array }[] = [];
