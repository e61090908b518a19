import { fieldAddress, realsOf } from './layout.ts';
import type { GridSetup } from './run.ts';

/**
 * The scaled fields themselves (ex ey ez hx hy hz, e = E·d and h = η·H·d, V, bias included) on the lattice's nodes
 * 0 … n: node (i, j, k) at i + (nx + 1)(j + (ny + 1)k). For tests and for looking inside; a run reads samples instead.
 */
export function readField(setup: GridSetup, field: number): Float64Array {
  const [nx, ny, nz] = setup.layout.cells;
  const out = new Float64Array((nx + 1) * (ny + 1) * (nz + 1));
  visit(setup, field, (reals, at, n) => {
    out[n] = reals[at]!;
  });
  return out;
}

/** Overwrites a field, in the same order as `readField`. Meant for `onStart`, before anything was marched. */
export function writeField(setup: GridSetup, field: number, values: ArrayLike<number>): void {
  visit(setup, field, (reals, at, n) => {
    reals[at] = values[n]!;
  });
}

function visit(
  { layout, memory }: GridSetup,
  field: number,
  each: (reals: Float32Array | Float64Array, at: number, n: number) => void,
): void {
  const reals = realsOf(layout, memory);
  const [nx, ny, nz] = layout.cells;
  let n = 0;
  for (let k = 0; k <= nz; k++)
    for (let j = 0; j <= ny; j++) {
      const row = fieldAddress(layout, field, 0, j, k) / layout.real;
      for (let i = 0; i <= nx; i++) each(reals, row + i, n++);
    }
}
