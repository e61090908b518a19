import { gaussLegendre } from '../gridding/gaussLegendre.ts';
import type { Vec3 } from '../scenario/model.ts';

/**
 * The lattice's Green's function in powers of D = ∂/∂t, unequal cells. With Λ = Σ_a D_a² (D_a the centred difference over
 * d_a) and δ = 1 at the origin's node, (Λ − D²/v²) g = −δ/(dx dy dz) has the solution
 *   g = g0 − D/(4πv) + (D²/v²) g2 − (D³/v³) r²/(24π) + …,   Λ g0 = −δ/(dx dy dz),   Λ g2 = g0.
 * Its odd terms are those of free space but for constants, which differences remove: a lattice carries what is slow
 * enough exactly. In free space g0 = 1/(4πr) and g2 = r/(8π).
 *
 * From the heat kernel on the integers, e^(−x) I_l(x) (Watson, Q. J. Math. 10, 1939, for g0 of the cube; from memory),
 * with α_a = (dx/d_a)² and K = Π_a e^(−2α_a t) I_{l_a}(2α_a t):
 *   g0 = dx²/(dx dy dz) ∫₀^∞ K dt,   g2 = −dx⁴/(dx dy dz) ∫₀^∞ t [K − K(0, 0, 0)] dt   (0 at the origin).
 * Only + − × ÷ and √ take part, so every host gets the same bits. g0 is right to rounding; g2 loses some three digits where
 * t is large and K − K(0, 0, 0) cancels, which still leaves ten in its second differences.
 */
export interface StaticGreen {
  /** largest |offset| along each axis that the tables hold, cells */
  readonly reach: readonly [number, number, number];
  /** g0, the static field's, at whole-cell offsets of any sign, 1/m */
  at(l: number, m: number, n: number): number;
  /** g2, which first makes it retarded, at whole-cell offsets of any sign, m */
  second(l: number, m: number, n: number): number;
}

/** Beyond this many of the largest cells the second-order expansion is as good as the tables. */
const NEAR_CELLS = 17.5;

/** Longest side of a table: with cells more unequal than about 3.5 : 1 the short axis is covered less far. */
const LONGEST = 64;

interface Tables {
  readonly reach: readonly [number, number, number];
  readonly g0: Float64Array;
  readonly g2: Float64Array;
}

const tables = new Map<string, Tables>();

/** The tables for a cell size (m), made on first use for each ratio of its sides (some ten milliseconds for a cube). */
export function staticGreen(cellSize: Vec3): StaticGreen {
  const [dx, dy, dz] = cellSize;
  const alpha: Vec3 = [1, (dx / dy) * (dx / dy), (dx / dz) * (dx / dz)];
  const key = alpha.join();
  let table = tables.get(key);
  if (!table) {
    const largest = Math.max(...cellSize);
    const side = (d: number) => Math.min(LONGEST, Math.ceil((NEAR_CELLS * largest) / d));
    table = tabulate(alpha, [side(dx), side(dy), side(dz)]);
    tables.set(key, table);
  }
  const { reach, g0, g2 } = table;
  const unit0 = dx / (dy * dz);
  const unit2 = unit0 * dx * dx;
  const rowY = reach[0] + 1;
  const rowZ = rowY * (reach[1] + 1);
  const index = (l: number, m: number, n: number) => Math.abs(l) + rowY * Math.abs(m) + rowZ * Math.abs(n);
  return {
    reach,
    at: (l, m, n) => unit0 * g0[index(l, m, n)]!,
    second: (l, m, n) => unit2 * g2[index(l, m, n)]!,
  };
}

/**
 * Both integrals for all offsets up to `reach`. With t = T (s/(1 − s))², T the largest 1/α, their tails, t^(−3/2) and
 * series in 1/t, become smooth at s = 1, and Gauss–Legendre panels on 0 < s < 1 converge to rounding.
 */
function tabulate(alpha: Vec3, reach: readonly [number, number, number]): Tables {
  const slowest = 1 / Math.min(...alpha);
  const size = (reach[0] + 1) * (reach[1] + 1) * (reach[2] + 1);
  const g0 = new Float64Array(size);
  const g2 = new Float64Array(size);
  const { nodes, weights } = gaussLegendre(32);
  const panels = 6;
  const bessel = reach.map((side) => new Float64Array(side + 1)) as [Float64Array, Float64Array, Float64Array];
  for (let panel = 0; panel < panels; panel++)
    for (let node = 0; node < nodes.length; node++) {
      const s = (panel + nodes[node]!) / panels;
      const ratio = s / (1 - s);
      const t = slowest * ratio * ratio;
      const weight = ((weights[node]! / panels) * 2 * t) / (s * (1 - s));
      for (let a = 0; a < 3; a++) scaledBessel(2 * alpha[a]! * t, bessel[a]!);
      const [bx, by, bz] = bessel;
      const origin = bz[0]! * by[0]! * bx[0]!;
      let index = 0;
      for (const kz of bz)
        for (const ky of by)
          for (const kx of bx) {
            const kernel = kz * ky * kx;
            g0[index]! += weight * kernel;
            g2[index]! += weight * t * (origin - kernel);
            index++;
          }
    }
  return { reach, g0, g2 };
}

/** e^(−x) I_l(x) for l = 0 … out.length − 1, x > 0. */
export function scaledBessel(x: number, out: Float64Array): void {
  const last = out.length - 1;
  if (x > Math.max(2000, last * last)) {
    for (let l = 0; l <= last; l++) out[l] = hankelSeries(l, x);
    return;
  }
  // The ratios I_l/I_{l−1} = x/(2l + x I_{l+1}/I_l), downwards from where they cannot matter (Miller's algorithm;
  // Abramowitz & Stegun 9.12, from memory): I_N/I_0 ≈ e^(−N²/2x). The sum I_0 + 2ΣI_l = e^x sets the scale.
  const start = last + 20 + Math.ceil(9 * Math.sqrt(x));
  let ratio = 0;
  let tail = 0;
  for (let l = start; l >= 1; l--) {
    ratio = x / (2 * l + x * ratio);
    tail = ratio * (1 + tail);
    if (l <= last) out[l] = ratio;
  }
  out[0] = 1 / (1 + 2 * tail);
  for (let l = 1; l <= last; l++) out[l]! *= out[l - 1]!;
}

/** e^(−x) I_l(x) ≈ (2πx)^(−½) Σ_k (−1)^k Π_{i≤k} (4l² − (2i−1)²)/(8 i x): Abramowitz & Stegun 9.7.1 (from memory). */
function hankelSeries(l: number, x: number): number {
  let term = 1;
  let sum = 1;
  for (let k = 1; Math.abs(term) > 1e-18 && k < 60; k++) {
    const odd = 2 * k - 1;
    term *= -(4 * l * l - odd * odd) / (8 * k * x);
    sum += term;
  }
  return sum / Math.sqrt(2 * Math.PI * x);
}
