import { cos, sin } from '../elementary/elementary.ts';
import type { Axis, Vec3 } from '../scenario/model.ts';
import type { Lattice } from './lattice.ts';

/**
 * The numerical dispersion relation of the Yee lattice, unequal cells, any homogeneous medium:
 *   [sin(ωΔt/2)/(vΔt)]² = Σ_a [sin(k_a d_a/2)/d_a]²
 * Yee, IEEE Trans. Antennas Propag. 14, 1966; Taflove & Hagness, Computational Electrodynamics, 3rd ed., ch. 4 (from memory).
 */
type DispersiveLattice = Pick<Lattice, 'cellSize' | 'timeStep'> & { readonly medium: { readonly speed: number } };

/**
 * The spatial symbol Σ_a [sin(k u_a d_a/2)/d_a]² (1/m²) in out[0] and its derivative in k,
 * Σ_a (u_a/d_a) sin(k u_a d_a/2) cos(k u_a d_a/2) (1/m), in out[1].
 */
function spatialSymbol(k: number, u: Vec3, d: Vec3, out: Float64Array): void {
  out[0] = 0;
  out[1] = 0;
  for (let a = 0; a < 3; a++) {
    const phase = (k * u[a]! * d[a]!) / 2;
    const s = sin(phase) / d[a]!;
    out[0]! += s * s;
    out[1]! += u[a]! * s * cos(phase);
  }
}

const symbol = new Float64Array(2);

/** The axis on which a wave along u meets the end of the Brillouin zone first. */
function firstAxis(u: Vec3, d: Vec3): Axis {
  const phase = (a: Axis) => Math.abs(u[a] * d[a]);
  const first = phase(1) > phase(0) ? 1 : 0;
  return phase(2) > phase(first) ? 2 : first;
}

/**
 * The largest wavenumber (rad/m) of a wave along the unit vector `direction`: where the spatial symbol has its first
 * maximum on the way out. Slower waves are the aliases of faster ones, so nothing resolved lies beyond.
 */
export function cutoffWavenumber(direction: Vec3, cellSize: Vec3): number {
  const axis = firstAxis(direction, cellSize);
  // Up to here every term of the symbol rises.
  let lower = Math.PI / Math.abs(direction[axis] * cellSize[axis]);
  const step = lower / 16;
  // On axes and diagonals the slope vanishes right here, but for rounding.
  const rising = (k: number) => {
    spatialSymbol(k, direction, cellSize, symbol);
    return symbol[1]! * cellSize[axis] > 1e-14;
  };
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
  const axis = firstAxis(direction, cellSize);
  let lower = 0;
  let upper = Math.PI / Math.abs(direction[axis] * cellSize[axis]);
  // At `upper` this axis alone contributes 1/d²; only above that is the cut-off in question.
  if (target * cellSize[axis] * cellSize[axis] > 1) {
    spatialSymbol(upper, direction, cellSize, symbol);
    if (symbol[0]! < target) {
      lower = upper;
      upper = cutoffWavenumber(direction, cellSize);
      spatialSymbol(upper, direction, cellSize, symbol);
      if (symbol[0]! < target) return undefined;
    }
  }
  const free = omega / medium.speed;
  let k = Math.min(Math.max(free + leadingWavenumberError(free, direction, lattice), lower), upper);
  // Newton doubles the digits each round and bisection halves the bracket: 100 rounds are never needed.
  for (let round = 0; round < 100; round++) {
    spatialSymbol(k, direction, cellSize, symbol);
    const excess = symbol[0]! - target;
    if (excess > 0) upper = k;
    else lower = k;
    let next = k - excess / symbol[1]!;
    if (!(next >= lower && next <= upper)) next = (lower + upper) / 2;
    if (Math.abs(next - k) <= 4 * Number.EPSILON * k) return next;
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
