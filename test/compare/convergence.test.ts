import { describe, expect, test } from 'vitest';
import { gridConvergenceIndex, observedOrders, representativeSize, richardson } from '../../src/compare/convergence.ts';
import { paretoFront } from '../../src/compare/front.ts';

/** Values f₀ + C h^p, for which every figure is known in closed form. */
const values = (sizes: readonly number[], f0: number, c: number, p: number) => sizes.map((h) => f0 + c * h ** p);

const LADDERS = [
  [10e-3, 5e-3, 2.5e-3],
  [9e-3, 6e-3, 5e-3],
  [12e-3, 8e-3, 7e-3, 3e-3],
];

describe('observed order', () => {
  test.each(LADDERS)('of C h^p it is p, pair by pair, for any ratio of refinement', (...sizes) => {
    for (const p of [0.5, 1, 2, 3.7])
      for (const order of observedOrders(sizes, values(sizes, 0, 42, p)))
        expect(Math.abs(order - p)).toBeLessThan(1e-12);
  });

  test('an error that vanishes has none', () => {
    expect(observedOrders([2, 1], [0.1, 0])).toEqual([Number.NaN]);
  });
});

describe('Richardson', () => {
  test.each(LADDERS)('finds limit and order of f₀ + C h^p, rising or falling', (...sizes) => {
    for (const p of [0.5, 1, 2, 4])
      for (const c of [3, -7]) {
        const found = richardson(sizes, values(sizes, 0.013, c, p));
        if (found.limit === null) throw new Error(found.reason);
        // Differences of values of some 1e-2 carry roundings of 1e-18, magnified by 1/|f₂ − f₁|.
        expect(Math.abs(found.order - p)).toBeLessThan(1e-6);
        expect(Math.abs(found.limit - 0.013)).toBeLessThan(1e-8);
        expect(found.orderFrom).toBe('three grids');
      }
  });

  test('two grids take the formal order', () => {
    expect(richardson([2, 1], values([2, 1], 0.5, 0.1, 2))).toEqual({
      limit: expect.closeTo(0.5, 14),
      order: 2,
      orderFrom: 'formal order',
    });
  });

  test('one grid, an oscillation, divergence and a missing value give no limit, with the reason', () => {
    for (const [sizes, f, reason] of [
      [[1], [0.1], 'one grid'],
      [[4, 2, 1], [0.1, 0.2, 0.15], 'one side'],
      [[4, 2, 1], [0.1, 0.2, 0.4], 'do not converge'],
      [[4, 2, 1], [0.1, Number.NaN, 0.4], 'missing'],
    ] as const) {
      const found = richardson(sizes, f);
      expect(found.limit).toBe(null);
      expect('reason' in found && found.reason).toContain(reason);
      expect(gridConvergenceIndex(sizes, f)).toEqual({ value: null, reason: 'reason' in found && found.reason });
    }
  });
});

describe('grid convergence index', () => {
  test.each(LADDERS)('is 1.25 |f₁ − f₀| on three grids or more', (...sizes) => {
    const gci = gridConvergenceIndex(sizes, values(sizes, 0.02, 5, 1.8));
    const finest = sizes[sizes.length - 1]!;
    expect(gci.value! / (1.25 * 5 * finest ** 1.8)).toBeCloseTo(1, 6);
    expect('safetyFactor' in gci && gci.safetyFactor).toBe(1.25);
  });

  test('is 3 |f₁ − f₀| on two grids of the formal order', () => {
    const gci = gridConvergenceIndex([2, 1], values([2, 1], 0.02, 0.01, 2));
    expect(gci.value).toBeCloseTo(0.03, 14);
  });

  test('covers an error that vanishes, and misses what does not go away with the cells', () => {
    const sizes = [4, 2, 1];
    const vanishing = values(sizes, 0, 0.01, 2);
    expect(gridConvergenceIndex(sizes, vanishing).value!).toBeGreaterThan(vanishing[2]!);
    const walls = values(sizes, 0.05, 0.01, 2);
    expect(gridConvergenceIndex(sizes, walls).value!).toBeLessThan(walls[2]!);
  });

  test('Roache’s worked example: 0.9705, 0.96854, 0.96178 on grids of ratio 2', () => {
    // P. J. Roache's worked example as NASA's NPARC tutorial retells it (from memory): p = 1.786, f₀ = 0.97130,
    // GCI₁₂ = 0.103083 % of f₁.
    const f = [0.96178, 0.96854, 0.9705];
    const found = richardson([4, 2, 1], f);
    if (found.limit === null) throw new Error(found.reason);
    expect(found.order).toBeCloseTo(1.786, 3);
    expect(found.limit).toBeCloseTo(0.9713, 5);
    expect(gridConvergenceIndex([4, 2, 1], f).value! / f[2]!).toBeCloseTo(0.00103083, 6);
  });
});

test('a cell’s one length is the cube root of its volume', () => {
  expect(representativeSize([5e-3, 5e-3, 5e-3])).toBe(5e-3);
  expect(representativeSize([1e-3, 2e-3, 4e-3])).toBeCloseTo(2e-3, 15);
});

test('the Pareto front is what nothing beats', () => {
  const choices = [
    { cost: 3, error: 1 },
    { cost: 1, error: 5 },
    { cost: 2, error: 5 },
    { cost: 4, error: 2 },
    { cost: 1, error: 6 },
    { cost: 2.5, error: 2 },
    { cost: Number.NaN, error: 0 },
  ];
  expect(paretoFront(choices)).toEqual([1, 5, 0]);
});
