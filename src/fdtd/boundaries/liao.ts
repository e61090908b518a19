import type { Boundary } from '../../scenario/model.ts';
import { type BoundaryMethod, pathInCells } from './boundary.ts';

/**
 * Liao's multi-transmitting condition of order 2: what comes to the wall is what was a way vΔt further in one step ago,
 * and the error of that is again what it was there one step ago,
 *   (1 − (1 − d)Z⁻¹T)² E0 = 0,   E0^{n+1} = 2(1 − d) T E^n − (1 − d)² T² E^{n−1},
 * Z⁻¹ one step back, T the value a way s = vΔt/h inward by quadratic interpolation between layers 0, 1 and 2,
 *   T = [(1 − s)(2 − s)/2, s(2 − s), s(s − 1)/2],
 * and T² over layers 0 … 4.
 * Z. P. Liao, H. L. Wong, B. P. Yang, Y. F. Yuan, Scientia Sinica A 27 (1984) 1063. The damping d is that of
 * M. Moghaddam, W. C. Chew, Microw. Opt. Technol. Lett. 4 (1991) 265, as a factor.
 *
 * damping d: 0 to 0.2, default 0.02. With d = 0 (the original) rounding grows until it takes over, soonest in single
 * precision; d ≥ 0.005 is stable. It needs no neighbours along the wall. A plane wave at angle θ from the normal returns
 *   −[(1 − (1 − d)e^(−jωΔt(1 − cos θ)))/(1 − (1 − d)e^(−jωΔt(1 + cos θ)))]²,
 * with d = 0 and small cells nearly Engquist & Majda's second order, −((1 − cos θ)/(1 + cos θ))².
 */
export const liao: BoundaryMethod<Extract<Boundary, { type: 'liao' }>> = {
  wall({ damping }, at) {
    const s = pathInCells(at);
    const transmitted = [((1 - s) * (2 - s)) / 2, s * (2 - s), (s * (s - 1)) / 2];
    const twice = [0, 0, 0, 0, 0];
    for (const [l, a] of transmitted.entries()) for (const [m, b] of transmitted.entries()) twice[l + m]! += a * b;
    const kept = 1 - damping;
    return {
      type: 'linear',
      older: twice.map((t) => -kept * kept * t),
      old: transmitted.map((t) => 2 * kept * t),
      now: [],
    };
  },
};
