import type { Medium } from '../scenario/model.ts';

/**
 * The elements a prescribed current is made of, each with its retarded field. R = observer − source, τ = t − delay − R/v
 * the retarded instant. An element's field is a sum of delayed waveforms,
 *   F(r, t) = Q q(τ) + W w(τ) + D w′(τ),   q = ∫w,
 * and each function below gives the three coefficients of every field quantity for a waveform of 1 A.
 *
 * Jefimenko's equations for a filament with charge by continuity: Jackson, Classical Electrodynamics, 3rd ed., §6.5
 * (from memory); Hertzian dipole: Balanis, Antenna Theory, 4th ed., §4.2 (from memory), here for any waveform.
 */

/** Field quantities in one vector: E (V/m), B (T), φ (V), A (V·s/m). */
export const QUANTITIES = 10;
export const ELECTRIC = 0;
export const MAGNETIC = 3;
export const SCALAR = 6;
export const VECTOR = 7;

/** Where the coefficients of q, w and w′ start in an element's vector of 30. */
export const CHARGE = 0;
export const CURRENT = QUANTITIES;
export const SLOPE = 2 * QUANTITIES;
export const COEFFICIENTS = 3 * QUANTITIES;

export interface Constants {
  /** 1/(4πε), m/F */
  readonly electric: number;
  /** μ/(4π), H/m */
  readonly magnetic: number;
  /** v, m/s */
  readonly speed: number;
}

export function constantsOf(medium: Medium): Constants {
  return {
    electric: 1 / (4 * Math.PI * medium.permittivity),
    magnetic: medium.permeability / (4 * Math.PI),
    speed: medium.speed,
  };
}

/** A point charge Q(t) = q: 4πε E = (Q/R³ + Q̇/(vR²)) R, 4πε φ = Q/R. Overwrites `out`. */
export function chargeElement(k: Constants, x: number, y: number, z: number, out: Float64Array): void {
  const inverse = 1 / Math.sqrt(x * x + y * y + z * z);
  const overR2 = k.electric * inverse * inverse;
  const still = overR2 * inverse;
  const moving = overR2 / k.speed;
  out.fill(0);
  out[CHARGE] = still * x;
  out[CHARGE + 1] = still * y;
  out[CHARGE + 2] = still * z;
  out[CURRENT] = moving * x;
  out[CURRENT + 1] = moving * y;
  out[CURRENT + 2] = moving * z;
  out[CHARGE + SCALAR] = k.electric * inverse;
}

/**
 * One metre of filament with tangent ŝ that carries I = a(s) w(t − p s), hence λ = a p w − a′ q (by λ̇ = −∂I/∂s):
 *   4πε E = (λ/R³ + λ̇/(vR²)) R − ŝ İ/(v²R)
 *   4π/μ B = (I/R³ + İ/(vR²)) ŝ×R,   4πε φ = λ/R,   4π/μ A = ŝ I/R
 * Overwrites `out`.
 * @param slowness p, s/m
 * @param amplitude a
 * @param gradient a′, 1/m
 */
export function filamentElement(
  k: Constants,
  x: number,
  y: number,
  z: number,
  sx: number,
  sy: number,
  sz: number,
  slowness: number,
  amplitude: number,
  gradient: number,
  out: Float64Array,
): void {
  const inverse = 1 / Math.sqrt(x * x + y * y + z * z);
  const perSpeed = 1 / k.speed;
  const near = inverse * inverse * inverse;
  const far = inverse * inverse * perSpeed;
  const carried = k.electric * amplitude * slowness;
  const left = -k.electric * gradient;
  const induced = k.electric * amplitude * inverse * perSpeed * perSpeed;
  const moved = carried * near + left * far;
  const magnetic = k.magnetic * amplitude;
  const cx = sy * z - sz * y;
  const cy = sz * x - sx * z;
  const cz = sx * y - sy * x;
  out[CHARGE] = left * near * x;
  out[CHARGE + 1] = left * near * y;
  out[CHARGE + 2] = left * near * z;
  out[CURRENT] = moved * x;
  out[CURRENT + 1] = moved * y;
  out[CURRENT + 2] = moved * z;
  out[SLOPE] = carried * far * x - induced * sx;
  out[SLOPE + 1] = carried * far * y - induced * sy;
  out[SLOPE + 2] = carried * far * z - induced * sz;
  out[CHARGE + MAGNETIC] = 0;
  out[CHARGE + MAGNETIC + 1] = 0;
  out[CHARGE + MAGNETIC + 2] = 0;
  out[CURRENT + MAGNETIC] = magnetic * near * cx;
  out[CURRENT + MAGNETIC + 1] = magnetic * near * cy;
  out[CURRENT + MAGNETIC + 2] = magnetic * near * cz;
  out[SLOPE + MAGNETIC] = magnetic * far * cx;
  out[SLOPE + MAGNETIC + 1] = magnetic * far * cy;
  out[SLOPE + MAGNETIC + 2] = magnetic * far * cz;
  out[CHARGE + SCALAR] = left * inverse;
  out[CURRENT + SCALAR] = carried * inverse;
  out[SLOPE + SCALAR] = 0;
  out[CHARGE + VECTOR] = 0;
  out[CHARGE + VECTOR + 1] = 0;
  out[CHARGE + VECTOR + 2] = 0;
  out[CURRENT + VECTOR] = magnetic * inverse * sx;
  out[CURRENT + VECTOR + 1] = magnetic * inverse * sy;
  out[CURRENT + VECTOR + 2] = magnetic * inverse * sz;
  out[SLOPE + VECTOR] = 0;
  out[SLOPE + VECTOR + 1] = 0;
  out[SLOPE + VECTOR + 2] = 0;
}

/**
 * A Hertzian dipole of moment w(t) d, n = R/|R|:
 *   4πε E = [3n(n·d) − d](q/R³ + w/(vR²)) + [n(n·d) − d] w′/(v²R)
 *   4π/μ B = (d×n)(w/R² + w′/(vR)),   4πε φ = n·d (q/R² + w/(vR)),   4π/μ A = d w/R
 * Overwrites `out`.
 * @param d moment for 1 A, m
 */
export function dipoleElement(
  k: Constants,
  x: number,
  y: number,
  z: number,
  d: readonly [number, number, number],
  out: Float64Array,
): void {
  const inverse = 1 / Math.sqrt(x * x + y * y + z * z);
  const perSpeed = 1 / k.speed;
  const n = [x * inverse, y * inverse, z * inverse] as const;
  const along = n[0] * d[0] + n[1] * d[1] + n[2] * d[2];
  const across = [d[1] * n[2] - d[2] * n[1], d[2] * n[0] - d[0] * n[2], d[0] * n[1] - d[1] * n[0]] as const;
  out.fill(0);
  for (let a = 0; a < 3; a++) {
    const still = k.electric * (3 * n[a]! * along - d[a]!) * inverse * inverse;
    out[CHARGE + a] = still * inverse;
    out[CURRENT + a] = still * perSpeed;
    out[SLOPE + a] = k.electric * (n[a]! * along - d[a]!) * inverse * perSpeed * perSpeed;
    out[CURRENT + MAGNETIC + a] = k.magnetic * across[a]! * inverse * inverse;
    out[SLOPE + MAGNETIC + a] = k.magnetic * across[a]! * inverse * perSpeed;
    out[CURRENT + VECTOR + a] = k.magnetic * d[a]! * inverse;
  }
  out[CHARGE + SCALAR] = k.electric * along * inverse * inverse;
  out[CURRENT + SCALAR] = k.electric * along * inverse * perSpeed;
}

/**
 * Part of the closed-form field of a full-speed wave on a straight piece along ẑ (see waves.ts): an axial and a
 * transverse coefficient, 4πε E = (axial ẑ + transverse ρ)/v, and B of the transverse part as in a plane wave,
 * 4π/μ B = transverse ẑ×ρ. Overwrites E and B at `kind` (CURRENT or SLOPE); the rest of `out` is 0.
 * @param rho the vector from the wire's axis to the observer, m
 * @param axial 1/m
 * @param transverse 1/m²
 */
export function waveElement(
  k: Constants,
  direction: readonly [number, number, number],
  rho: readonly [number, number, number],
  axial: number,
  transverse: number,
  kind: number,
  out: Float64Array,
): void {
  out.fill(0);
  const electric = k.electric / k.speed;
  const magnetic = k.magnetic * transverse;
  for (let a = 0; a < 3; a++) {
    const b = (a + 1) % 3;
    const c = (a + 2) % 3;
    out[kind + a] = electric * (axial * direction[a]! + transverse * rho[a]!);
    out[kind + MAGNETIC + a] = magnetic * (direction[b]! * rho[c]! - direction[c]! * rho[b]!);
  }
}
