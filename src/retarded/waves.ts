import type { Vec3 } from '../scenario/model.ts';
import { COEFFICIENTS, type Constants, CURRENT, SLOPE, waveElement } from './elements.ts';
import { gaussLegendre } from './quadrature.ts';
import type { TermList } from './terms.ts';

/** A full-speed wave on a straight piece, as seen from the end it is launched at: I = factor · w(t − delay − z/v). */
export interface Wave {
  readonly from: Vec3;
  /** unit vector of travel and of positive current */
  readonly direction: Vec3;
  readonly length: number;
  readonly factor: number;
  readonly delay: number;
  readonly waveform: number;
  readonly label: string;
}

/**
 * The field of a full-speed wave on a straight piece 0 ≤ z ≤ L, in closed form at every distance. With z₁ = z, z₂ = z − L
 * measured from its ends, r their distances, g₁ = w(t − r₁/v), g₂ = w(t − (L + r₂)/v), and full end charges (q and Q̇
 * terms of `chargeElement`) counted elsewhere, what is left of Jefimenko's integrals is
 *   4πε v E = Σ_ends ± g [ρ (1 + z/r)/ρ² − ẑ/r],   4π/μ B = Σ_ends ± g (1 + z/r)/ρ² ẑ×ρ   (+ launch, − arrival):
 * two spherical waves. (Known for sinusoids: Schelkunoff & Friis, Antennas, 1952, §10.9, from memory; here for any w,
 * by d/ds[w(t − (s + R)/v)] = −(1 − (z − s)/R) w′/v.)
 *
 * (1 + z/r)/ρ² = 1/(r(r − z)) with r − z = ρ²/(r + z) for z > 0. Beyond the far end both terms grow like 2/ρ² and cancel:
 * there 2(g₁ − g₂)/ρ² is ∫w′ over the gap of delays (r₂ + L − r₁)/v = 2Lρ²/(v (r₂ + z₂)(r₁ + L + r₂)), by Gauss's rule,
 * where `smallGap` says that the gap is short for this waveform.
 */
export function addWave(
  k: Constants,
  wave: Wave,
  point: Vec3,
  smallGap: (waveform: number, from: number, gap: number, slimness: number) => boolean,
  list: TermList,
): void {
  const { from, direction: d, length, factor, waveform } = wave;
  const rx = point[0] - from[0];
  const ry = point[1] - from[1];
  const rz = point[2] - from[2];
  const z1 = rx * d[0] + ry * d[1] + rz * d[2];
  const z2 = z1 - length;
  const rho: Vec3 = [rx - z1 * d[0], ry - z1 * d[1], rz - z1 * d[2]];
  const rho2 = rho[0] * rho[0] + rho[1] * rho[1] + rho[2] * rho[2];
  const r1 = Math.sqrt(rho2 + z1 * z1);
  const r2 = Math.sqrt(rho2 + z2 * z2);
  const launched = wave.delay + r1 / k.speed;
  const arrived = wave.delay + (length + r2) / k.speed;
  const size = Math.abs(rx) + Math.abs(ry) + Math.abs(rz) + length + extent(point) + extent(from);

  if (z2 > 0) {
    const perRho2 = (2 * length) / (k.speed * (r2 + z2) * (r1 + length + r2));
    const gap = perRho2 * rho2;
    if (smallGap(waveform, launched, gap, rho2 / (r2 * r2))) {
      const { nodes, weights } = gaussLegendre(GAP_POINTS);
      for (let m = 0; m < GAP_POINTS; m++) {
        const x = (1 + nodes[m]!) / 2;
        waveElement(k, d, rho, 0, perRho2 * weights[m]!, SLOPE, element);
        list.add(element, factor, launched + x * gap, waveform, size / r2);
      }
      waveElement(k, d, rho, -1 / r1, -1 / (r1 * (r1 + z1)), CURRENT, element);
      list.add(element, factor, launched, waveform, size / r2);
      waveElement(k, d, rho, -1 / r2, -1 / (r2 * (r2 + z2)), CURRENT, element);
      list.add(element, -factor, arrived, waveform, size / r2);
      return;
    }
  }
  const slim = size / Math.min(Math.sqrt(rho2), r1, r2);
  waveElement(k, d, rho, -1 / r1, beam(z1, r1, rho2), CURRENT, element);
  list.add(element, factor, launched, waveform, z1 > 0 ? slim : size / r1);
  waveElement(k, d, rho, -1 / r2, beam(z2, r2, rho2), CURRENT, element);
  list.add(element, -factor, arrived, waveform, z2 > 0 ? slim : size / r2);
}

/** Σ weights of Gauss's rule on [−1, 1] is 2, which is the factor of 2(g₁ − g₂)/ρ². */
const GAP_POINTS = 4;
const element = new Float64Array(COEFFICIENTS);

/** (1 + z/r)/ρ² */
const beam = (z: number, r: number, rho2: number): number => (z > 0 ? (r + z) / (r * rho2) : 1 / (r * (r - z)));

const extent = (p: Vec3): number => Math.abs(p[0]) + Math.abs(p[1]) + Math.abs(p[2]);
