/**
 * Prescribed currents: e_x ← e_x − c_x·η·I at every source edge, right after the stencil has passed its row, with I at
 * half a step, so that J^{n+½} drives E^n → E^{n+1}. The driver has multiplied c_x·η·I out.
 */
import { CELL, ny } from './memory';
import { sourceValues } from './step';

/** Source edges sorted by row: those of row j + ny·k are rowStart[row] … rowStart[row + 1] − 1. */
let rowStart: usize = 0;
/** Address of each edge's e. */
let edges: usize = 0;

export function sources(starts: usize, addresses: usize): void {
  rowStart = starts;
  edges = addresses;
}

/** Drives rows [j0, j1) of plane k. */
@inline
export function drive(k: i32, j0: i32, j1: i32, step: usize): void {
  const row = rowStart + (<usize>(k * ny) << 2);
  const to = <usize>load<u32>(row + (<usize>j1 << 2));
  const values = sourceValues(step);
  for (let e = <usize>load<u32>(row + (<usize>j0 << 2)); e < to; e++) {
    const p = <usize>load<u32>(edges + (e << 2));
    store<Real>(p, load<Real>(p) - load<Real>(values + e * CELL));
  }
}
