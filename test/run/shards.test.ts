import { expect, test } from 'vitest';
import { sharesOf } from '../../src/run/shards.ts';
import { SMALL } from './surveyFolder.ts';

test('shares are of like cost, whatever varies fastest', () => {
  const sized = (cellSize: string) => ({ json: { ...SMALL, grid: { ...SMALL.grid, cellSize } } });
  // Every fourth is eight times the work: dealt out in turn, one share would get all of them.
  const entries = Array.from({ length: 16 }, (_, n) => sized(n % 4 === 3 ? '6 mm' : '12 mm'));
  const shares = sharesOf(entries, 4);
  for (const index of [1, 2, 3, 4]) {
    const own = entries.filter((_, n) => shares[n] === index);
    expect(own.filter(({ json }) => json.grid.cellSize === '6 mm')).toHaveLength(1);
    expect(own).toHaveLength(4);
  }
});
