import type { Boundary } from '../../scenario/model.ts';
import { type BoundaryMethod, type FaceLattice, type LinearWall, pathInCells } from './boundary.ts';

/**
 * Mur's first-order condition: the one-way wave equation (∂t − v∂n) E = 0 at the wall (Engquist & Majda 1977, first
 * order), centred half a cell inward and half a step back,
 *   E0^{n+1} = E1^n + (s − 1)/(s + 1) (E1^{n+1} − E0^n),   s = vΔt/h with h the cell size along the normal.
 * G. Mur, IEEE Trans. Electromagn. Compat. 23 (1981) 377.
 *
 * No parameters. A plane wave at angle θ from the normal returns (cos θ − 1)/(cos θ + 1); nothing at normal incidence,
 * everything at grazing. A static field near a wall is lost. Stable for s ≤ 1, which the Courant limit implies.
 */
export const mur1: BoundaryMethod<Extract<Boundary, { type: 'mur1' }>> = {
  wall: (_boundary, at) => firstOrder(at),
};

export function firstOrder(at: FaceLattice): LinearWall {
  const s = pathInCells(at);
  const factor = (s - 1) / (s + 1);
  return { type: 'linear', older: [], old: [-factor, 1], now: [factor] };
}
