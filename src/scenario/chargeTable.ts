import { cos } from '../elementary/elementary.ts';

/** Chebyshev coefficients a panel; twenty leave rounding alone where a panel is as long as its distance from a singularity. */
const COEFFICIENTS = 24;

/** Of the largest |w| on the panel: what its last coefficients may be. */
const ACCURACY = 4 * Number.EPSILON;

/** Halvings of a panel at most. */
const DEEPEST = 12;

/**
 * q(t) = ∫₀ᵗ w for a w without a closed antiderivative: Chebyshev polynomials of w on panels that double away from t = 0
 * and are halved until their last coefficients are rounding, integrated term by term (Clenshaw & Curtis 1960, from memory).
 * Before `start` w is taken as a straight line from 0.
 */
export class ChargeTable {
  readonly #bounds: number[];
  /** charge up to each panel's lower bound, and the coefficients of its integral */
  readonly #before: number[] = [];
  readonly #panels: Float64Array[] = [];
  readonly #start: number;
  readonly #slope: number;
  /** q(end), A·s, and after it */
  readonly total: number;

  constructor(w: (t: number) => number, start: number, end: number) {
    this.#start = start;
    this.#slope = w(start) / start;
    this.#bounds = [start];
    let sum = (w(start) * start) / 2;
    for (let a = start; a < end; ) {
      const b = Math.min(end, 2 * a);
      sum = this.#add(w, a, b, sum, 0);
      a = b;
    }
    this.total = sum;
  }

  at(t: number): number {
    if (t <= this.#start) return (this.#slope * t * t) / 2;
    const bounds = this.#bounds;
    let low = 0;
    let high = bounds.length - 1;
    if (t >= bounds[high]!) return this.total;
    while (high - low > 1) {
      const middle = (low + high) >> 1;
      if (t < bounds[middle]!) high = middle;
      else low = middle;
    }
    const x = (2 * t - bounds[low]! - bounds[low + 1]!) / (bounds[low + 1]! - bounds[low]!);
    return this.#before[low]! + clenshaw(this.#panels[low]!, x);
  }

  /** Appends [a, b], whole or in halves; returns the charge up to b. */
  #add(w: (t: number) => number, a: number, b: number, before: number, depth: number): number {
    const series = chebyshev((x) => w((a + b + (b - a) * x) / 2));
    const size = series.reduce((most, c) => Math.max(most, Math.abs(c)), 0);
    const tail = Math.abs(series[COEFFICIENTS - 1]!) + Math.abs(series[COEFFICIENTS - 2]!);
    if (tail > ACCURACY * size && depth < DEEPEST) {
      const middle = (a + b) / 2;
      return this.#add(w, middle, b, this.#add(w, a, middle, before, depth + 1), depth + 1);
    }
    const integral = integrated(series, (b - a) / 2);
    this.#before.push(before);
    this.#panels.push(integral);
    this.#bounds.push(b);
    return before + clenshaw(integral, 1);
  }
}

/** Coefficients c of Σ c_k T_k, c_0 whole, through the Chebyshev points of the first kind. */
function chebyshev(f: (x: number) => number): Float64Array {
  const values = Float64Array.from({ length: COEFFICIENTS }, (_, m) => f(COSINES[2 * m + 1]!));
  return Float64Array.from({ length: COEFFICIENTS }, (_, k) => {
    let sum = 0;
    for (let m = 0; m < COEFFICIENTS; m++) sum += values[m]! * COSINES[(k * (2 * m + 1)) % COSINES.length]!;
    return ((k === 0 ? 1 : 2) * sum) / COEFFICIENTS;
  });
}

/** cos(πm/(2·COEFFICIENTS)), one turn of them */
const COSINES = Float64Array.from({ length: 4 * COEFFICIENTS }, (_, m) => cos((Math.PI * m) / (2 * COEFFICIENTS)));

/** The integral from −1 times `half`: ∫T_k = T_{k+1}/(2(k+1)) − T_{k−1}/(2(k−1)). */
function integrated(series: Float64Array, half: number): Float64Array {
  const out = new Float64Array(COEFFICIENTS + 1);
  for (let k = 1; k <= COEFFICIENTS; k++) {
    const below = (k === 1 ? 2 : 1) * series[k - 1]!;
    out[k] = (half * (below - (series[k + 1] ?? 0))) / (2 * k);
  }
  let start = 0;
  for (let k = 1; k <= COEFFICIENTS; k++) start += k % 2 === 0 ? out[k]! : -out[k]!;
  out[0] = -start;
  return out;
}

/** Σ c_k T_k(x) (Clenshaw 1955, from memory). */
function clenshaw(c: Float64Array, x: number): number {
  let b1 = 0;
  let b2 = 0;
  for (let k = c.length - 1; k > 0; k--) [b1, b2] = [c[k]! + 2 * x * b1 - b2, b1];
  return c[0]! + x * b1 - b2;
}
