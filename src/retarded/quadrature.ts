import { cos } from '../elementary/elementary.ts';

/**
 * Kronrod's extension of Gauss's 7-point rule on [−1, 1]: nodes in descending order from the outermost, 8 of the 15 (the
 * rule is symmetric, the last is 0), every second one a node of Gauss. Piessens, de Doncker-Kapenga, Überhuber, Kahaner,
 * QUADPACK, 1983, from memory; the tests integrate powers with it.
 */
const KRONROD_NODES = [
  0.9914553711208126, 0.9491079123427585, 0.8648644233597691, 0.7415311855993945, 0.5860872354676911,
  0.4058451513773972, 0.20778495500789848, 0,
];
const KRONROD_WEIGHTS = [
  0.022935322010529224, 0.06309209262997856, 0.10479001032225019, 0.14065325971552592, 0.1690047266392679,
  0.19035057806478542, 0.20443294007529889, 0.20948214108472782,
];
const GAUSS_WEIGHTS = [0, 0.1294849661688697, 0, 0.27970539148927664, 0, 0.3818300505051189, 0, 0.4179591836734694];

export const KRONROD_POINTS = 15;

/** Nodes ascending on [−1, 1], weights of the 15-point rule, and what its 7-point rule differs by (Kronrod − Gauss). */
export const kronrod = (() => {
  const nodes = new Float64Array(KRONROD_POINTS);
  const weights = new Float64Array(KRONROD_POINTS);
  const differences = new Float64Array(KRONROD_POINTS);
  for (let m = 0; m < KRONROD_POINTS; m++) {
    const from = m < 8 ? m : 14 - m;
    nodes[m] = m < 8 ? -KRONROD_NODES[from]! : KRONROD_NODES[from]!;
    weights[m] = KRONROD_WEIGHTS[from]!;
    differences[m] = KRONROD_WEIGHTS[from]! - GAUSS_WEIGHTS[from]!;
  }
  return { nodes, weights, differences };
})();

/**
 * The error of Kronrod's rule from its difference to Gauss's: QUADPACK's estimate spread · min(1, (200 d/spread)^1.5),
 * the difference itself being the error of the weaker rule.
 * @param spread ∫|f − mean f|
 */
export function kronrodError(difference: number, spread: number): number {
  if (spread === 0) return difference;
  const ratio = (200 * difference) / spread;
  return ratio < 1 ? spread * ratio * Math.sqrt(ratio) : Math.max(difference, spread);
}

/**
 * Nodes and weights of Gauss's n-point rule on [−1, 1] (weights sum to 2). Newton's method on the Legendre polynomial
 * from cos π(m − ¼)/(n + ½) (Abramowitz & Stegun 22.16.6, from memory), which is in the basin of every root.
 */
export function gaussLegendre(n: number): { readonly nodes: Float64Array; readonly weights: Float64Array } {
  const known = rules.get(n);
  if (known) return known;
  const nodes = new Float64Array(n);
  const weights = new Float64Array(n);
  for (let m = 0; m < n; m++) {
    let x = -cos((Math.PI * (m + 0.75)) / (n + 0.5));
    let slope = 0;
    for (let round = 0; round < 8; round++) {
      let value = 1;
      let previous = 0;
      for (let j = 0; j < n; j++) {
        const next = ((2 * j + 1) * x * value - j * previous) / (j + 1);
        previous = value;
        value = next;
      }
      slope = (n * (previous - x * value)) / (1 - x * x);
      x -= value / slope;
    }
    nodes[m] = x;
    weights[m] = 2 / ((1 - x * x) * slope * slope);
  }
  const rule = { nodes, weights };
  rules.set(n, rule);
  return rule;
}

const rules = new Map<number, { readonly nodes: Float64Array; readonly weights: Float64Array }>();
