import type { Slab, SnapshotFrame, SnapshotRegion } from '../../src/trace/snapshots.ts';
import { instantsOf } from '../../src/trace/trace.ts';

/** A region of 3 × 4 × 5 cells, every second one, at three instants. */
export const REGION: SnapshotRegion = {
  name: 'part',
  counts: [3, 4, 5],
  origin: [-0.1, 0.2, 0.3],
  spacing: [0.02, 0.04, 0.06],
  cellSize: [0.01, 0.02, 0.03],
};

export const frameOf = (precision: 'single' | 'double'): SnapshotFrame => ({
  instants: instantsOf(30, 1e-11, 10),
  precision,
});

/** A value that tells where and when it belongs, and that single precision holds. */
export const value = (side: 'grid' | 'exact', component: number, m: number, i: number, j: number, k: number): number =>
  (side === 'grid' ? 1 : -1) * (m * 4096 + component * 512 + k * 64 + j * 8 + i + 0.5);

/** All slabs of the region, of two rows or fewer each, in an order that is not the file's. */
export function slabs(): Slab[] {
  const list: Slab[] = [];
  for (const side of ['exact', 'grid'] as const)
    for (let layer = 4; layer >= 0; layer--)
      for (const [row, rows] of [
        [3, 1],
        [0, 2],
        [2, 1],
      ] as const) {
        const values = new Float64Array(rows * 3 * 6 * 3);
        for (let p = 0; p < rows * 3; p++)
          for (let c = 0; c < 6; c++)
            for (let m = 0; m < 3; m++)
              values[(p * 6 + c) * 3 + m] = value(side, c, m, p % 3, row + Math.floor(p / 3), layer);
        list.push({ side, layer, row, rows, values });
      }
  return list;
}
