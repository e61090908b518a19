import { expect, test } from 'vitest';
import { stabilities } from './stability.ts';

test('no boundary raises the energy of random fields over 1000 steps', () => {
  for (const { boundary, precision, unstableAt } of stabilities(1000))
    expect(unstableAt, `${boundary}, ${precision}`).toBeNull();
});
