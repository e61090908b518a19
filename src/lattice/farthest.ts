import { sin } from '../elementary/elementary.ts';
import type { Vec3 } from '../scenario/model.ts';
import { wavenumberError } from './dispersion.ts';
import type { Lattice } from './lattice.ts';

/**
 * The far field in one direction, by frequency. Lattice and free space multiply the same spectrum by e^(−j k r), so only
 * its modulus matters to the relative error; frequencies are evenly spaced.
 */
export interface FarField {
  /** unit vector from the source */
  readonly direction: Vec3;
  /** rad/s, ascending */
  readonly omega: Float64Array;
  /** |F(ω)| of the vector far field, any unit */
  readonly amplitude: Float64Array;
}

/** Shares of the far field's energy, each with its k_num − k (rad/m). */
interface DispersingPower {
  readonly share: Float64Array;
  readonly excess: Float64Array;
  /** share of the energy above the lattice's cut-off, which it does not carry at all */
  readonly lost: number;
}

function dispersingPower(farField: FarField, lattice: Lattice): DispersingPower {
  const { omega, amplitude, direction } = farField;
  let total = 0;
  for (const f of amplitude) total += f * f;
  if (!(total > 0)) throw new RangeError('The far field is zero at every frequency; it has no relative error.');
  const share = new Float64Array(omega.length);
  const excess = new Float64Array(omega.length);
  let lost = 0;
  for (let m = 0; m < omega.length; m++) {
    const power = (amplitude[m]! * amplitude[m]!) / total;
    const kappa = wavenumberError(omega[m]!, direction, lattice);
    if (kappa === undefined) {
      lost += power;
    } else {
      share[m] = power;
      excess[m] = kappa;
    }
  }
  return { share, excess, lost };
}

/** e(r)² = Σ |F|² |e^(−j(k_num − k) r) − 1|² / Σ |F|², where |e^(−jx) − 1| = 2 |sin(x/2)|. */
function relativeError(power: DispersingPower, distance: number): number {
  let sum = power.lost;
  for (let m = 0; m < power.share.length; m++) {
    const s = 2 * sin((power.excess[m]! * distance) / 2);
    sum += power.share[m]! * s * s;
  }
  return Math.sqrt(sum);
}

/**
 * Relative L2 error, over time, that the lattice makes of a far field it carries over `distance` metres: a number from 0
 * to 2, near √2 once the phases have run apart.
 * @throws RangeError for a far field that is zero everywhere
 */
export function dispersionError(farField: FarField, lattice: Lattice, distance: number): number {
  return relativeError(dispersingPower(farField, lattice), distance);
}

/** Rounds of the search; each gains at least a factor of 2 in what is left below tolerances of ½. */
const ROUNDS = 10_000;

/**
 * The distance (m) at which the dispersion error first reaches `tolerance`: 0 where energy above the cut-off alone
 * exceeds it, Infinity where it is never reached (the magic time step along a diagonal).
 *
 * The error is the norm of a vector whose derivative in r has the norm K = √(Σ share (k_num − k)²) at every r, so the
 * error cannot grow faster than K: steps of (tolerance − error)/K approach the first crossing and never jump over it,
 * whatever the error does later.
 * @param tolerance a fraction, above 0 and at most 1
 * @throws RangeError for a tolerance outside that range, or a far field that is zero everywhere
 */
export function farthestWithin(tolerance: number, farField: FarField, lattice: Lattice): number {
  if (!(tolerance > 0 && tolerance <= 1))
    throw new RangeError(`tolerance is ${tolerance}; a farthest distance needs one above 0 and at most 1.`);
  const power = dispersingPower(farField, lattice);
  if (Math.sqrt(power.lost) >= tolerance) return 0;
  let rate = 0;
  for (let m = 0; m < power.share.length; m++) rate += power.share[m]! * power.excess[m]! * power.excess[m]!;
  rate = Math.sqrt(rate);
  if (rate === 0) return Number.POSITIVE_INFINITY;
  let distance = 0;
  for (let round = 0; round < ROUNDS; round++) {
    const missing = tolerance - relativeError(power, distance);
    if (missing <= 1e-9 * tolerance) return distance;
    distance += missing / rate;
  }
  return Number.POSITIVE_INFINITY;
}
