import type { Medium, Vec3 } from '../scenario/model.ts';

/** An unbounded Yee lattice in a homogeneous medium; a grid problem of the solver is one too. */
export interface Lattice {
  /** dx, dy, dz, m */
  readonly cellSize: Vec3;
  /** Δt, s */
  readonly timeStep: number;
  readonly medium: Medium;
}
