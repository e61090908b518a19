import type { Boundary } from '../../scenario/model.ts';
import { type BoundaryMethod, pathInCells } from './boundary.ts';
import { firstOrder } from './mur1.ts';

/**
 * Mur's second-order condition: (∂n∂t − ∂t²/v + (v/2)(∂a² + ∂b²)) E = 0 at the wall, n pointing inward, a and b along the
 * wall (Engquist & Majda 1977, second order), centred half a cell inward,
 *   E0^{n+1} = −E1^{n−1} + (s − 1)/(s + 1) (E1^{n+1} + E0^{n−1}) + 2/(s + 1) (E0^n + E1^n)
 *              + Σ_{l=0,1} Σ_a τ_a (E_l^n one cell up along a − 2E_l^n + E_l^n one cell down),
 *   s = vΔt/h,   τ_a = (vΔt)²/(2(s + 1) d_a²), with cubic cells s²/(2(s + 1)).
 * G. Mur, IEEE Trans. Electromagn. Compat. 23 (1981) 377; there for cubic cells.
 *
 * Where a point has no neighbour to one side, at the rims of the wall, Mur's first order takes its place (common
 * practice); beside a perfect conductor the neighbour is the point's own mirror image.
 *
 * No parameters. A plane wave at angle θ from the normal returns −((1 − cos θ)/(1 + cos θ))². The condition has a double
 * root at zero frequency and nothing that damps it: waves are absorbed for good, but the static field of charges drifts
 * linearly in time, in any precision (in a box of 15 cells the discrete energy of random charges is above its start after
 * 6200 steps; test/stress/stability.test.ts). Beside faces with other second-order conditions or with layers it is
 * unstable within some hundred steps; beside pec, mur1 and itself it is not, and scenarios with others are refused. In a
 * small box the rims spoil it, and a static field near a wall is lost.
 */
export const mur2: BoundaryMethod<Extract<Boundary, { type: 'mur2' }>> = {
  wall(_boundary, at) {
    const s = pathInCells(at);
    const factor = (s - 1) / (s + 1);
    const path = at.medium.speed * at.timeStep;
    const across = at.across.map((d) => (path * path) / (2 * (s + 1) * d * d)) as [number, number];
    const here = 2 / (s + 1) - 2 * (across[0] + across[1]);
    return {
      type: 'linear',
      older: [factor, -1],
      old: [here, here],
      now: [factor],
      sideways: { across, rim: firstOrder(at) },
    };
  },
};
