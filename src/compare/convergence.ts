import { exp, log, pow } from '../elementary/elementary.ts';

/**
 * Convergence of a number on grids that are refined. Lists run from the coarsest grid to the finest; sizes are positive and
 * descending, in any one unit.
 *
 * Here the true error is known, so an order can be told from two grids. Richardson's extrapolation and the grid
 * convergence index are what somebody without an exact answer would have: they are given the same numbers, and what they
 * say can be held against the truth.
 */

/** Formal order of Yee's scheme, taken where two grids cannot tell one. */
const FORMAL_ORDER = 2;

/** Safety factors of the grid convergence index: P. J. Roache, J. Fluids Eng. 116 (1994) 405. */
const THREE_GRIDS = 1.25;
const TWO_GRIDS = 3;

/** No scheme here is of a higher order; a larger value means that the finest grids no longer differ. */
const HIGHEST_ORDER = 20;

/** The size of a cell as one length, ∛(dx dy dz), m: ASME V&V 20-2009, §2-4.1 (from memory). */
export function representativeSize([dx, dy, dz]: readonly [number, number, number]): number {
  return dx === dy && dy === dz ? dx : exp(log(dx * dy * dz) / 3);
}

/** p = ln(e₁/e₂)/ln(h₁/h₂) of an error that vanishes with h; NaN where an error is 0 or missing. */
export function observedOrder(h1: number, e1: number, h2: number, e2: number): number {
  return e1 > 0 && e2 > 0 ? log(e1 / e2) / log(h1 / h2) : Number.NaN;
}

/** The order between every two consecutive grids. */
export function observedOrders(sizes: readonly number[], errors: readonly number[]): number[] {
  return sizes.slice(1).map((h, m) => observedOrder(sizes[m]!, errors[m]!, h, errors[m + 1]!));
}

export type Richardson =
  | {
      /** what the values tend to as h → 0 */
      readonly limit: number;
      /** p of f(h) = limit + C h^p */
      readonly order: number;
      /** whether p was found from three grids or taken to be the scheme's own */
      readonly orderFrom: 'three grids' | 'formal order';
    }
  | { readonly limit: null; readonly reason: string };

/**
 * Richardson's extrapolation of values that behave as f(h) = f₀ + C h^p: with three grids or more from the three finest,
 * which give p as well; with two by the formal order.
 *
 * p solves (f₃ − f₂)/(f₂ − f₁) = (h₃^p − h₂^p)/(h₂^p − h₁^p), f₁ on the finest grid, for any ratio of refinement (the
 * implicit equation of ASME V&V 20-2009, §2-4.1, from memory, in a form that bisection can solve: the right side grows
 * with p).
 */
export function richardson(sizes: readonly number[], values: readonly number[]): Richardson {
  const last = sizes.length - 1;
  if (last < 1) return { limit: null, reason: 'one grid shows no convergence' };
  if (values.slice(-3).some((v) => !Number.isFinite(v))) return { limit: null, reason: 'a value is missing' };
  const [h1, h2] = [sizes[last]!, sizes[last - 1]!];
  const [f1, f2] = [values[last]!, values[last - 1]!];
  const limitBy = (p: number) => f1 - (f2 - f1) / (pow(h2 / h1, p) - 1);
  if (last === 1) return { limit: limitBy(FORMAL_ORDER), order: FORMAL_ORDER, orderFrom: 'formal order' };
  const ratio = (values[last - 2]! - f2) / (f2 - f1);
  if (!(ratio > 0)) return { limit: null, reason: 'the three finest grids do not converge to one side' };
  const order = orderOf(ratio, sizes[last - 2]! / h2, h2 / h1);
  if (Number.isNaN(order)) return { limit: null, reason: 'the three finest grids do not converge' };
  return { limit: limitBy(order), order, orderFrom: 'three grids' };
}

/** The p of a ratio of differences; NaN where none from 0 to `HIGHEST_ORDER` gives it. */
function orderOf(ratio: number, r32: number, r21: number): number {
  const of = (p: number) => (pow(r21, p) * (pow(r32, p) - 1)) / (pow(r21, p) - 1);
  let low = 1e-3;
  let high = HIGHEST_ORDER;
  if (ratio < of(low) || ratio > of(high)) return Number.NaN;
  for (let n = 0; n < 60; n++) {
    const middle = (low + high) / 2;
    if (of(middle) < ratio) low = middle;
    else high = middle;
  }
  return (low + high) / 2;
}

export type GridConvergenceIndex =
  | {
      /** of the finest grid, in the values' own unit */
      readonly value: number;
      readonly safetyFactor: number;
      readonly order: number;
    }
  | { readonly value: null; readonly reason: string };

/**
 * The grid convergence index of the finest grid as an absolute bound, Fs |f₂ − f₁|/(r^p − 1): Fs = 1.25 with three grids
 * or more, 3 with two and the formal order. P. J. Roache, J. Fluids Eng. 116 (1994) 405; ASME V&V 20-2009.
 */
export function gridConvergenceIndex(sizes: readonly number[], values: readonly number[]): GridConvergenceIndex {
  const extrapolated = richardson(sizes, values);
  if (extrapolated.limit === null) return { value: null, reason: extrapolated.reason };
  const safetyFactor = extrapolated.orderFrom === 'three grids' ? THREE_GRIDS : TWO_GRIDS;
  const change = Math.abs(values[values.length - 1]! - extrapolated.limit);
  return { value: safetyFactor * change, safetyFactor, order: extrapolated.order };
}
