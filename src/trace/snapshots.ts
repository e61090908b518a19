import type { Instants } from './trace.ts';

/**
 * Yee cells whose fields are kept at some instants, on a rectangular lattice: a plane of the scenario (one cell along its
 * normal) or the box, every cell or every n-th. A cell stands at its node; each component lives up to half a grid cell from
 * there, as `STAGGER` has it, and nothing is moved.
 */
export interface SnapshotRegion {
  readonly name: string;
  /** cells kept along x, y, z */
  readonly counts: Triple;
  /** position of the first cell's node, m */
  readonly origin: Triple;
  /** from one cell that is kept to the next, m */
  readonly spacing: Triple;
  /** of the grid, m */
  readonly cellSize: Triple;
}

type Triple = readonly [number, number, number];

/** What is common to all files of snapshots of one comparison. */
export interface SnapshotFrame {
  readonly instants: Instants;
  readonly precision: 'single' | 'double';
}

export const SIDES = ['grid', 'exact'] as const;
export type Side = (typeof SIDES)[number];

/** Whole rows along x of one layer of a region, all instants of one solver: values[(point·6 + component)·instants + m]. */
export interface Slab {
  readonly side: Side;
  /** index along z */
  readonly layer: number;
  /** first index along y, and how many rows */
  readonly row: number;
  readonly rows: number;
  /** V/m and A/m; NaN where a component lies on a source */
  readonly values: Float64Array;
}
