import type { EdgeCurrents } from '../gridding/edges.ts';
import type { Boundary, Face, Medium } from '../scenario/model.ts';

/**
 * One grid run, told without a scenario: a lattice, its walls, what drives it and what is read from it.
 * Nodes of the lattice run from −pad[face] cells below the working box to pad[face] cells above it; absorbing layers are
 * the outermost cells of the pad. Indices of edges and samples are relative to node (0, 0, 0) of the working box.
 */
export interface GridProblem {
  /** cells of the working box along each axis */
  readonly boxCells: readonly [number, number, number];
  /** cells between the box and the outer wall of the lattice, absorbing layers included */
  readonly pad: Readonly<Record<Face, number>>;
  /** dx, dy, dz, m */
  readonly cellSize: readonly [number, number, number];
  /** Δt, s */
  readonly timeStep: number;
  readonly steps: number;
  readonly medium: Medium;
  readonly boundary: Readonly<Record<Face, Boundary>>;
  readonly precision: 'single' | 'double';
  /** round once where product and sum meet: faster where the runtime has it, last bits differ; off by default */
  readonly fusedMultiplyAdd?: boolean;
  readonly currents: EdgeCurrents;
  /** expected peak of edge voltage e = E·d, V: scales the bias that keeps denormals away */
  readonly scale: number;
  readonly samples: readonly SampleGroup[];
  /** march only cells that the front has reached and that can still reach the working box */
  readonly activeRegion?: { readonly margin: number };
}

/** Yee cells read every `every`-th step, the last step included; six components each. */
export interface SampleGroup {
  /** i, j, k, 3 a point */
  readonly cell: Int32Array;
  readonly every: number;
}
