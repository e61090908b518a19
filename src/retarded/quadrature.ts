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

/** The lowest of the degrees in which samples at Kronrod's nodes are expanded for an error estimate; the highest is 14. */
const LOWEST_DEGREE = 7;

/**
 * Polynomials of degree 7 … 14, orthonormal in sums over Kronrod's nodes with his weights, times those weights:
 * expansions[(degree − 7)·15 + m]. Applied to samples they give what is in them of each degree, and nothing of lower ones
 * (null rules).
 */
export const expansions = (() => {
  const { nodes, weights } = kronrod;
  const product = (a: Float64Array, b: Float64Array) => a.reduce((sum, x, m) => sum + weights[m]! * x * b[m]!, 0);
  const basis: Float64Array[] = [];
  for (let degree = 0; degree < KRONROD_POINTS; degree++) {
    let next =
      degree === 0 ? new Float64Array(KRONROD_POINTS).fill(1) : basis[degree - 1]!.map((x, m) => x * nodes[m]!);
    // Twice, so that what rounding leaves of lower degrees is taken out too.
    for (let round = 0; round < 2; round++)
      for (const lower of basis) {
        const part = product(next, lower);
        next = next.map((x, m) => x - part * lower[m]!);
      }
    const size = Math.sqrt(product(next, next));
    basis.push(next.map((x) => x / size));
  }
  const out = new Float64Array((KRONROD_POINTS - LOWEST_DEGREE) * KRONROD_POINTS);
  basis.slice(LOWEST_DEGREE).forEach((polynomial, n) => {
    out.set(
      polynomial.map((x, m) => x * weights[m]!),
      n * KRONROD_POINTS,
    );
  });
  return out;
})();

/** Degrees in `expansions`. */
export const DEGREES = KRONROD_POINTS - LOWEST_DEGREE;

/**
 * Over what is extrapolated. Measured: 0.01 to 0.1 suffices for poles beside the interval, 0.7 for broken powers at its ends
 * ((1 + x)^0.2 the worst). Kinks inside it may need more: integrals are cut there.
 */
const SAFETY = 1.5;

/** From degree 14, the last that is seen, to 24, the first that Kronrod's rule gets wrong, two degrees at a time. */
const STEPS = 5;

/** Falls slower than this promise nothing: what is seen is not extrapolated. */
const SLOW = 0.75;
const SLOW_SAFETY = 5;

/**
 * The error of Kronrod's rule on [−1, 1] from what its samples hold of the degrees 7 … 14: the coefficients of an analytic
 * integrand fall geometrically, those of a broken one slowly. They are taken two by two, so that even and odd integrands
 * look alike, and the slowest fall seen is continued to degree 24. (Berntsen & Espelid, "Error estimation in automatic quadrature routines", ACM TOMS 17, 1991, from memory.)
 * @param squares squared coefficients, ascending degrees; of a vector, their sums over its components
 */
export function kronrodError(squares: Float64Array): number {
  const first = Math.sqrt(squares[0]! + squares[1]!);
  const second = Math.sqrt(squares[2]! + squares[3]!);
  const third = Math.sqrt(squares[4]! + squares[5]!);
  const last = Math.sqrt(squares[6]! + squares[7]!);
  if (last === 0) return 0;
  const fall = Math.max(second / first, third / second, last / third);
  if (!(fall < SLOW)) return SLOW_SAFETY * Math.max(second, third, last);
  let error = SAFETY * last;
  for (let step = 0; step < STEPS; step++) error *= fall;
  return error;
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
