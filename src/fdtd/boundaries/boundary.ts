import type { Boundary, Medium } from '../../scenario/model.ts';

/**
 * The TypeScript half of an outer boundary: what it asks of the kernel at one face, as numbers. The kernel's half is
 * the stretched stencil (assembly/fdtd/rows.ts) and what closes a wall (assembly/fdtd/mur.ts).
 */
export interface BoundaryMethod<B extends Boundary = Boundary> {
  /** cells behind the wall, counted inwards, in which coordinates are stretched */
  layers(boundary: B): number;
  /** the stretch at a relative depth from 0 (inner end of the layers) to 1 (the wall) */
  stretch(boundary: B, depth: number, at: FaceLattice): Stretch;
  /** what is done with tangential e on the wall itself */
  wall(boundary: B, at: FaceLattice): Wall;
}

/** The lattice across a face. */
export interface FaceLattice {
  /** cell size along the face's normal, m */
  readonly cell: number;
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
  /** e0 ← e1 + factor (e1′ − e0), e1 one cell inward and e1′ its new value */
  | { readonly type: 'mur'; readonly factor: number };
