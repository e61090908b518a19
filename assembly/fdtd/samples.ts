/**
 * Reading cells: all six components of a sample's cell are copied once its row has got its new h, when e (walls
 * included) and h of the step are both final.
 */
import { CELL, EX, EY, EZ, HX, HY, HZ, ny } from './memory';
import { SAMPLE_GROUPS, sampleBuffer } from './step';

/** Tables of the groups: for each, the address of rowStart (as for sources) and that of the cells' offsets. */
let groups: i32 = 0;
let tables: usize = 0;

export function samples(count: i32, addresses: usize): void {
  groups = min(count, SAMPLE_GROUPS);
  tables = addresses;
}

/** Reads rows [j0, j1) of plane k into each group's buffer of this step. */
@inline
export function sample(k: i32, j0: i32, j1: i32, step: usize): void {
  for (let g = 0; g < groups; g++) {
    const buffer = sampleBuffer(step, g);
    if (buffer) sampleGroup(tables + (<usize>g << 3), buffer, k, j0, j1);
  }
}

function sampleGroup(table: usize, buffer: usize, k: i32, j0: i32, j1: i32): void {
  const row = <usize>load<u32>(table) + (<usize>(k * ny) << 2);
  const cells = <usize>load<u32>(table, 4);
  const to = <usize>load<u32>(row + (<usize>j1 << 2));
  for (let c = <usize>load<u32>(row + (<usize>j0 << 2)); c < to; c++) {
    const p = <usize>load<u32>(cells + (c << 2));
    const out = buffer + c * (6 * CELL);
    store<Real>(out, load<Real>(p, EX));
    store<Real>(out, load<Real>(p, EY), CELL);
    store<Real>(out, load<Real>(p, EZ), 2 * CELL);
    store<Real>(out, load<Real>(p, HX), 3 * CELL);
    store<Real>(out, load<Real>(p, HY), 4 * CELL);
    store<Real>(out, load<Real>(p, HZ), 5 * CELL);
  }
}
