/**
 * Where everything lies in the memory that all threads share; drawn in ../README.md.
 *
 * `Real` (f32 or f64) and FIELD_STRIDE (bytes from one field to the next) are given to the compiler, so that the bases
 * of the six fields are constants: one cell offset p then reaches all of them, `v128.load(p, HX)`, and the inner loops
 * need three index registers instead of eighteen.
 */

/** Bytes of a cell and of a vector. */
export const CELL: usize = sizeof<Real>();
export const VECTOR: usize = 16;
export const LANES: i32 = 16 / sizeof<Real>();

/** Words by which threads talk to each other. */
export const STOP: usize = 1024;
export const BARRIER: usize = 1088;
/** Progress counters, one cache line each: PROGRESS_BLOCKS blocks in flight by PROGRESS_TILES tiles. */
export const PROGRESS: usize = 4096;
export const PROGRESS_BLOCKS: i32 = 16;
export const PROGRESS_TILES: i32 = 64;

export const FIELDS: usize = 131072;
export const EX: usize = FIELDS;
export const EY: usize = FIELDS + <usize>FIELD_STRIDE;
export const EZ: usize = FIELDS + 2 * <usize>FIELD_STRIDE;
export const HX: usize = FIELDS + 3 * <usize>FIELD_STRIDE;
export const HY: usize = FIELDS + 4 * <usize>FIELD_STRIDE;
export const HZ: usize = FIELDS + 5 * <usize>FIELD_STRIDE;

/** Cells of the lattice along each axis: nodes 0 … n, outer walls at node 0 and node n. */
export let nx: i32 = 0;
export let ny: i32 = 0;
export let nz: i32 = 0;
/** Vectors that hold cells 0 … nx − 1 of a row. */
export let rowVectors: i32 = 0;
/** Bytes from one row, or one plane, to the next. */
export let rowBytes: usize = 0;
export let planeBytes: usize = 0;
/** Offset of cell (0, 0, 0) from the base of its field: behind a ghost plane, a ghost row and a vector of padding. */
export let origin: usize = 0;

export function lattice(cellsX: i32, cellsY: i32, cellsZ: i32): void {
  nx = cellsX;
  ny = cellsY;
  nz = cellsZ;
  rowVectors = (nx + LANES - 1) / LANES;
  rowBytes = <usize>(rowVectors + 1) * VECTOR;
  planeBytes = rowBytes * <usize>(ny + 2);
  origin = planeBytes + rowBytes + VECTOR;
}

/** Offset of cell (0, j, k), the same in every field. */
@inline
export function rowOffset(j: i32, k: i32): usize {
  return origin + <usize>k * planeBytes + <usize>j * rowBytes;
}

/** Sets every Real from `from` up to `to` (both multiples of 16) to `value`. */
export function fill(from: usize, to: usize, value: f64): void {
  const all = v128.splat<Real>(<Real>value);
  for (let p = from; p < to; p += VECTOR) v128.store(p, all);
}
