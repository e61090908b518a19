import { expect, test } from 'vitest';
import { besides, stabilities } from '../fdtd/stability.ts';

test('no boundary raises the energy of random fields over 20 000 steps, but for Mur’s second order', () => {
  for (const { boundary, precision, unstableAt } of stabilities(20_000)) {
    // Its double root at zero frequency lets the static field of charges drift linearly: the energy grows as the square of
    // time, in single and double precision alike, and is above its start after some thousand steps.
    if (boundary === 'mur2') expect(unstableAt).toBeGreaterThan(3000);
    else expect(unstableAt, `${boundary}, ${precision}`).toBeNull();
  }
});

test('walls beside others are stable too, but for Mur’s second order beside what scenarios refuse', () => {
  const pairs = besides(2000);
  console.table(pairs);
  for (const { pair, unstableAt } of pairs) {
    const refused = pair.includes('mur2') && !/pec|mur1/.test(pair);
    expect(unstableAt === null, pair).toBe(!refused);
  }
});
