import type { Boundary, Medium } from '../../scenario/model.ts';

/**
 * The TypeScript half of an outer boundary: what it asks of the kernel at one face, as numbers. The kernel's half is
 * the stretched stencil (assembly/fdtd/rows.ts) and what is done on a wall (assembly/fdtd/walls.ts).
 */
export interface BoundaryMethod<B extends Boundary = Boundary> {
  /**
   * the stretch at a relative depth from 0 (inner end of the layers) to 1 (the wall), for a boundary that stretches
   * coordinates in all cells behind its face
   */
  readonly stretch?: (boundary: B, depth: number, at: FaceLattice) => Stretch;
  /** what is done on the wall itself */
  wall(boundary: B, at: FaceLattice): Wall;
}

/** The lattice at a face. */
export interface FaceLattice {
  /** cell size along the face's normal, m */
  readonly cell: number;
  /** cell sizes along the next axis (of x, y, z, x, …) and the one after it, m */
  readonly across: readonly [number, number];
  /** s */
  readonly timeStep: number;
  readonly medium: Medium;
}

/** A difference Δ becomes Δ/κ + ψ, with ψ ← bψ + aΔ at every step. */
export interface Stretch {
  readonly b: number;
  readonly a: number;
  readonly inverseKappa: number;
}

/** No stretch. */
export const PLAIN: Stretch = { b: 0, a: 0, inverseKappa: 1 };

export type Wall =
  /** tangential e stays as it is */
  | { readonly type: 'held' }
  /** tangential h half a cell inside the outermost cell is minus that one cell further in */
  | { readonly type: 'mirror' }
  | LinearWall;

/**
 * Tangential e on the wall from what it was and what it is further in, e_l being l cells inward:
 *   e_0^{n+1} ← Σ_l older[l] e_l^{n−1} + Σ_l old[l] e_l^n + Σ_{l≥1} now[l − 1] e_l^{n+1}
 *               + Σ_{l=0,1} Σ_a across[a] (e_l^n one cell up along a + e_l^n one cell down)
 */
export interface LinearWall {
  readonly type: 'linear';
  readonly older: readonly number[];
  readonly old: readonly number[];
  readonly now: readonly number[];
  readonly sideways?: {
    /** for the directions of `FaceLattice.across` */
    readonly across: readonly [number, number];
    /** what is done where there is no neighbour to one side */
    readonly rim: LinearWall;
  };
}

/** s = vΔt/h, h the cell size along the normal. */
export const pathInCells = ({ cell, timeStep, medium }: FaceLattice): number => (medium.speed * timeStep) / cell;
