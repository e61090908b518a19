/**
 * What differential operators with constant coefficients make of the retarded Green's function, as delayed time
 * derivatives. Let D = ∂/∂t act on the source's waveform and
 *   G = e^(−Dr/v)/(4πr),   F = (v/8π) D⁻¹ e^(−Dr/v),   f_m = ((1/r) d/dr)^m f.
 * F is the response to G itself, (∇² − D²/v²) F = −G, and it stays within the family: F_m = −G_{m−1}/2 for m ≥ 1.
 *
 * For any radial f:
 *   ∂^α f = Σ_j Π_a α_a!/(j_a! (α_a − 2j_a)! 2^{j_a}) x_a^{α_a − 2j_a} f_{|α| − Σj}
 * so that every operator becomes Σ_m p_m(x, y, z) G_m with polynomials p_m. And, with y = Dr/v,
 *   G_m = (−1)^m θ_m(y) e^(−y)/(4π r^{2m+1}),  θ_0 = 1, θ_1 = 1 + y, θ_m = (2m − 1) θ_{m−1} + y² θ_{m−2}
 * (reverse Bessel polynomials; Grosswald, Bessel Polynomials, 1978, from memory).
 */

/** Numbers of derivatives along x, y, z. */
export type Orders = readonly [number, number, number];

/** Powers of D that an operator may carry besides those of the derivatives: D⁻¹ for charges, D⁰, D for İ. */
export type TimePower = -1 | 0 | 1;

/** Coefficients on D⁻¹ … D⁴ of a waveform: q, w, w′, w″, w‴, w⁗. */
export const SIX = 6;

interface Monomial {
  readonly time: TimePower;
  /** m of G_m */
  readonly radial: number;
  readonly powers: Orders;
  factor: number;
}

/** Highest power of a coordinate that an operator of six derivatives reaches. */
const HIGHEST = 6;
const STRIDE = HIGHEST + 1;

/** A place relative to the source, with the powers of its coordinates. */
export class Position {
  /** powers[a · 7 + p] = x_a^p */
  readonly powers = new Float64Array(3 * STRIDE);
  /** r, m */
  distance = 0;

  /** @param x, y, z metres */
  set(x: number, y: number, z: number): void {
    this.#powersOf(0, x);
    this.#powersOf(STRIDE, y);
    this.#powersOf(2 * STRIDE, z);
    this.distance = Math.sqrt(x * x + y * y + z * z);
  }

  #powersOf(base: number, coordinate: number): void {
    let power = 1;
    for (let p = 0; p <= HIGHEST; p++) {
      this.powers[base + p] = power;
      power *= coordinate;
    }
  }
}

/** A sum of factor · D^time ∂^α acting on G or on F, compiled to monomials. */
export class RadialOperator {
  readonly #monomials: Monomial[] = [];
  /** by time power, then by m */
  readonly #sums = new Float64Array(3 * SIX);

  /** Adds factor · D^time ∂^α G. */
  ofG(factor: number, time: TimePower, alpha: Orders): this {
    return this.#expand(factor, time, alpha, 0);
  }

  /** Adds factor · D^time ∂^α F; |α| ≥ 1, so that F itself does not occur. */
  ofF(factor: number, time: TimePower, alpha: Orders): this {
    return this.#expand(-factor / 2, time, alpha, -1);
  }

  #expand(factor: number, time: TimePower, alpha: Orders, shift: -1 | 0): this {
    const total = alpha[0] + alpha[1] + alpha[2];
    for (let i = 0; 2 * i <= alpha[0]; i++)
      for (let j = 0; 2 * j <= alpha[1]; j++)
        for (let k = 0; 2 * k <= alpha[2]; k++) {
          const powers: Orders = [alpha[0] - 2 * i, alpha[1] - 2 * j, alpha[2] - 2 * k];
          const count = pairings(alpha[0], i) * pairings(alpha[1], j) * pairings(alpha[2], k);
          this.#add({ time, radial: total - i - j - k + shift, powers, factor: factor * count });
        }
    return this;
  }

  #add(term: Monomial): void {
    const same = this.#monomials.find(
      (m) => m.time === term.time && m.radial === term.radial && m.powers.every((p, a) => p === term.powers[a]),
    );
    if (same) same.factor += term.factor;
    else this.#monomials.push(term);
  }

  /**
   * The operator's field at a position as coefficients on the delayed waveform's derivatives.
   * @param speed v, m/s
   * @param out out[k + 1] multiplies D^k, k = −1 … 4
   */
  coefficients(position: Position, speed: number, out: Float64Array): void {
    const { powers, distance } = position;
    const sums = this.#sums.fill(0);
    for (const { time, radial, powers: p, factor } of this.#monomials)
      sums[(time + 1) * SIX + radial]! += factor * powers[p[0]]! * powers[STRIDE + p[1]]! * powers[2 * STRIDE + p[2]]!;
    out.fill(0);
    const delay = distance / speed;
    let scale = 1 / (4 * Math.PI * distance);
    for (let m = 0; m < SIX; m++) {
      for (let shift = 0; shift < 3; shift++) {
        let term = sums[shift * SIX + m]! * scale;
        if (term === 0) continue;
        const theta = THETA[m]!;
        for (let k = 0; k <= m; k++) {
          out[k + shift]! += theta[k]! * term;
          term *= delay;
        }
      }
      scale /= -distance * distance;
    }
  }
}

/** α!/(j! (α − 2j)! 2^j): the ways to choose j pairs among α things. */
function pairings(alpha: number, j: number): number {
  let count = 1;
  for (let i = 0; i < j; i++) count *= ((alpha - 2 * i) * (alpha - 2 * i - 1)) / (2 * (i + 1));
  return count;
}

/** θ_m's coefficients, lowest power first. */
const THETA: readonly (readonly number[])[] = (() => {
  const theta = [[1], [1, 1]];
  for (let m = 2; m < SIX; m++) {
    const next = new Array<number>(m + 1).fill(0);
    theta[m - 1]!.forEach((c, k) => {
      next[k]! += (2 * m - 1) * c;
    });
    theta[m - 2]!.forEach((c, k) => {
      next[k + 2]! += c;
    });
    theta.push(next);
  }
  return theta;
})();
