import { gaussLegendre } from '../gridding/gaussLegendre.ts';
import type { Vec3 } from '../scenario/model.ts';

/**
 * The static Green's function of the lattice, unequal cells: the g with
 *   Σ_a [g(x + d_a) − 2 g(x) + g(x − d_a)]/d_a² = −δ/(dx dy dz)   (δ = 1 at the origin's node, 0 elsewhere)
 * that vanishes at infinity. From the heat kernel on the integers, e^(−x) I_l(x) (Watson, Q. J. Math. 10, 1939, for the
 * cube; from memory), with α_a = (dx/d_a)²:
 *   g = dx²/(dx dy dz) ∫₀^∞ Π_a e^(−2α_a t) I_{l_a}(2α_a t) dt.
 * Only + − × ÷ and √ take part, so every host gets the same bits.
 */
export interface StaticGreen {
  /** largest |offset| along each axis that the table holds, cells */
  readonly reach: readonly [number, number, number];
  /** g at whole-cell offsets (l, m, n), 1/m; any sign, |offset| ≤ reach */
  at(l: number, m: number, n: number): number;
}

/** Beyond this many of the largest cells the second-order expansion is as good as the table. */
export const NEAR_CELLS = 17.5;

/** Longest side of a table: with cells more unequal than about 3.5 : 1 the short axis is covered less far. */
const LONGEST = 64;

const tables = new Map<string, { reach: readonly [number, number, number]; values: Float64Array }>();

/** The table for a cell size (m), made on first use for each ratio of its sides (a few milliseconds for a cube). */
export function staticGreen(cellSize: Vec3): StaticGreen {
  const [dx, dy, dz] = cellSize;
  const alpha: Vec3 = [1, (dx / dy) * (dx / dy), (dx / dz) * (dx / dz)];
  const key = alpha.join();
  let table = tables.get(key);
  if (!table) {
    const largest = Math.max(...cellSize);
    const side = (d: number) => Math.min(LONGEST, Math.ceil((NEAR_CELLS * largest) / d));
    const reach = [side(dx), side(dy), side(dz)] as const;
    table = { reach, values: tabulate(alpha, reach) };
    tables.set(key, table);
  }
  const { reach, values } = table;
  const unit = dx / (dy * dz);
  const rowY = reach[0] + 1;
  const rowZ = rowY * (reach[1] + 1);
  return {
    reach,
    at: (l, m, n) => unit * values[Math.abs(l) + rowY * Math.abs(m) + rowZ * Math.abs(n)]!,
  };
}

/**
 * ∫₀^∞ Π_a e^(−2α_a t) I_{l_a}(2α_a t) dt for all offsets up to `reach`. With t = T (s/(1 − s))², T the largest 1/α, the
 * integrand's t^(−3/2) tail becomes smooth at s = 1, and Gauss–Legendre panels on 0 < s < 1 converge to rounding.
 */
function tabulate(alpha: Vec3, reach: readonly [number, number, number]): Float64Array {
  const slowest = 1 / Math.min(...alpha);
  const values = new Float64Array((reach[0] + 1) * (reach[1] + 1) * (reach[2] + 1));
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
      let index = 0;
      for (const kz of bessel[2])
        for (const ky of bessel[1]) {
          const outer = weight * kz * ky;
          for (const kx of bessel[0]) values[index++]! += outer * kx;
        }
    }
  return values;
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
