import { cos, sin } from '../elementary/elementary.ts';
import type { Vec3 } from '../scenario/model.ts';
import type { Lattice } from './lattice.ts';

/**
 * The numerical dispersion relation of the Yee lattice, unequal cells, any homogeneous medium:
 *   [sin(ωΔt/2)/(vΔt)]² = Σ_a [sin(k_a d_a/2)/d_a]²
 * Yee, IEEE Trans. Antennas Propag. 14, 1966; Taflove & Hagness, Computational Electrodynamics, 3rd ed., ch. 4 (from memory).
 */
type DispersiveLattice = Pick<Lattice, 'cellSize' | 'timeStep'> & { readonly medium: { readonly speed: number } };

/** Half the square root of the lattice Laplacian's symbol, squared: Σ_a [sin(k u_a d_a/2)/d_a]², 1/m². */
function spatialSymbol(k: number, u: Vec3, d: Vec3): number {
  let sum = 0;
  for (let a = 0; a < 3; a++) {
    const s = sin((k * u[a]! * d[a]!) / 2) / d[a]!;
    sum += s * s;
  }
  return sum;
}

/** ∂/∂k of the spatial symbol: Σ_a (u_a/d_a) sin(k u_a d_a/2) cos(k u_a d_a/2), 1/m. */
function spatialSymbolSlope(k: number, u: Vec3, d: Vec3): number {
  let sum = 0;
  for (let a = 0; a < 3; a++) {
    const phase = (k * u[a]! * d[a]!) / 2;
    sum += (u[a]! / d[a]!) * sin(phase) * cos(phase);
  }
  return sum;
}

/** Up to this wavenumber no component passes the end of the Brillouin zone, so the spatial symbol rises: π/max|u_a d_a|. */
const zoneEdge = (u: Vec3, d: Vec3) =>
  Math.PI / Math.max(Math.abs(u[0] * d[0]), Math.abs(u[1] * d[1]), Math.abs(u[2] * d[2]));

/**
 * The largest wavenumber (rad/m) of a wave along the unit vector `direction`: where the spatial symbol has its first
 * maximum on the way out. Slower waves are the aliases of faster ones, so nothing resolved lies beyond.
 */
export function cutoffWavenumber(direction: Vec3, cellSize: Vec3): number {
  let lower = zoneEdge(direction, cellSize);
  const step = lower / 16;
  // At the edge itself the slope may be zero but for rounding, along axes and diagonals.
  const rising = (k: number) => spatialSymbolSlope(k, direction, cellSize) * cellSize[0] > 1e-14;
  if (!rising(lower)) return lower;
  let upper = lower + step;
  while (rising(upper)) {
    lower = upper;
    upper += step;
  }
  for (;;) {
    const middle = (lower + upper) / 2;
    if (middle <= lower || middle >= upper) return middle;
    if (rising(middle)) lower = middle;
    else upper = middle;
  }
}

/**
 * Real wavenumber k (rad/m) at which the lattice carries the angular frequency `omega` (rad/s, ≥ 0) along the unit vector
 * `direction`: the root of the dispersion relation below the cut-off, by Newton's method inside a bracket.
 * @returns undefined above the lattice's cut-off for that direction (or where ωΔt > π): nothing propagates there
 */
export function numericalWavenumber(omega: number, direction: Vec3, lattice: DispersiveLattice): number | undefined {
  const { cellSize, timeStep, medium } = lattice;
  if (omega === 0) return 0;
  if (omega * timeStep > Math.PI) return undefined;
  const temporal = sin((omega * timeStep) / 2) / (medium.speed * timeStep);
  const target = temporal * temporal;
  let upper = zoneEdge(direction, cellSize);
  if (spatialSymbol(upper, direction, cellSize) < target) {
    upper = cutoffWavenumber(direction, cellSize);
    if (spatialSymbol(upper, direction, cellSize) < target) return undefined;
  }
  let lower = 0;
  let k = omega / medium.speed;
  k = Math.min(k + leadingWavenumberError(k, direction, lattice), upper);
  // Newton doubles the digits each round and bisection halves the bracket: 100 rounds are never needed.
  for (let round = 0; round < 100; round++) {
    const excess = spatialSymbol(k, direction, cellSize) - target;
    if (excess > 0) upper = k;
    else lower = k;
    let next = k - excess / spatialSymbolSlope(k, direction, cellSize);
    if (!(next > lower && next < upper)) next = (lower + upper) / 2;
    if (Math.abs(next - k) <= 2 * Number.EPSILON * k) return next;
    k = next;
  }
  return k;
}

/**
 * k_num − k to leading order (rad/m), for the free wavenumber k = ω/v:
 *   (k³/24) [Σ_a u_a⁴ d_a² − (vΔt)²]
 * the dispersion relation expanded to second order in cell size and time step.
 */
export function leadingWavenumberError(k: number, u: Vec3, lattice: DispersiveLattice): number {
  const step = lattice.medium.speed * lattice.timeStep;
  let sum = -step * step;
  for (let a = 0; a < 3; a++) {
    const square = u[a]! * u[a]! * lattice.cellSize[a]!;
    sum += square * square;
  }
  return (k * k * k * sum) / 24;
}

/**
 * k_num − ω/v (rad/m): the phase, in radians a metre, by which a wave along the unit vector `direction` falls behind on
 * the lattice. Undefined above the cut-off.
 */
export function wavenumberError(omega: number, direction: Vec3, lattice: DispersiveLattice): number | undefined {
  const k = numericalWavenumber(omega, direction, lattice);
  return k === undefined ? undefined : k - omega / lattice.medium.speed;
}
