import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { boundaryLevel, budgetOf, type Histories, partSignals } from '../../src/compare/budget.ts';
import { fieldOf, gaussian, levelsOf, scaled, sum } from './synthetic.ts';

const exact = fieldOf(2, 150, (p, c, t) => (c + 1 + p) * gaussian(t, 70, 12));

/** Histories whose parts are given multiples of the exact field. */
function historiesWith(parts: { boundary: number; lattice: number; gridding: number; quadrature: number }): Histories {
  const computed = scaled(exact, 1 + parts.quadrature);
  const gridded = sum(computed, scaled(exact, parts.gridding));
  const free = sum(gridded, scaled(exact, parts.lattice));
  const grid = sum(free, scaled(exact, parts.boundary));
  return { grid, free, gridded, computed, exact };
}

describe('budget', () => {
  it('of parts that cancel has signed shares: 3 % and −1 % make 2 %, 150 % and −50 % of it', () => {
    const budget = budgetOf(
      historiesWith({ boundary: 0, lattice: 0.03, gridding: -0.01, quadrature: 0 }),
      levelsOf(),
      'E',
    );
    // Parts are differences of numbers near 1: relative rounding EPSILON/0.01.
    expect(budget.lattice!.relativeL2).toBeCloseTo(0.03, 12);
    expect(budget.gridding.relativeL2).toBeCloseTo(0.01, 12);
    expect(budget.total.relativeL2).toBeCloseTo(0.02, 12);
    expect(budget.lattice!.share).toBeCloseTo(1.5, 10);
    expect(budget.gridding.share).toBeCloseTo(-0.5, 10);
    expect(budget.boundary!.relativeL2).toBe(0);
    expect(budget.total.share).toBe(1);
    expect(budget.boundaryAndLattice).toBeNull();
  });

  it('has shares that sum to 1, whatever the parts', () => {
    const part = fc.double({ min: -1, max: 1, noNaN: true });
    fc.assert(
      fc.property(part, part, part, part, (boundary, lattice, gridding, quadrature) => {
        fc.pre(Math.abs(boundary + lattice + gridding + quadrature) > 1e-3);
        const budget = budgetOf(historiesWith({ boundary, lattice, gridding, quadrature }), levelsOf(), 'H');
        const shares = [budget.boundary!, budget.lattice!, budget.gridding, budget.quadrature].map(
          ({ share }) => share,
        );
        // Shares reach 1/1e-3 and carry the rounding of fields near 1 to 5 against a total of 1e-3.
        expect(Math.abs(shares.reduce((a, b) => a + b, 0) - 1)).toBeLessThan(1e-9);
      }),
      { seed: 11, numRuns: 50 },
    );
  });

  it('of orthogonal parts adds in squares: shares are the squares over the total’s', () => {
    const even = fieldOf(1, 100, (_, c, t) => (c === 0 && t % 2 === 0 ? 0.3 : 0));
    const odd = fieldOf(1, 100, (_, c, t) => (c === 0 && t % 2 === 1 ? 0.4 : 0));
    const one = fieldOf(1, 100, (_, c) => (c === 0 ? 1 : 0));
    const gridded = sum(one, even);
    const free = sum(gridded, odd);
    const budget = budgetOf({ grid: free, free, gridded, computed: one, exact: one }, levelsOf(), 'E');
    expect(budget.lattice!.share).toBeCloseTo(0.16 / 0.25, 12);
    expect(budget.gridding.share).toBeCloseTo(0.09 / 0.25, 12);
    expect(budget.total.relativeL2).toBeCloseTo(Math.sqrt(0.125), 12);
  });

  it('pools sums before roots', () => {
    // Point 0 wrong by half, point 1 right, energies 1 and 9: √(0.25/10), not the mean of 0.5 and 0.
    const one = fieldOf(2, 1, (p, c) => (c === 2 ? 1 + 2 * p : 0));
    const grid = fieldOf(2, 1, (p, c) => (c === 2 ? 1 + 2 * p + (p === 0 ? 0.5 : 0) : 0));
    const histories = { grid, free: grid, gridded: one, computed: one, exact: one };
    expect(budgetOf(histories, levelsOf(), 'E').total.relativeL2).toBeCloseTo(Math.sqrt(0.025), 14);
    expect(budgetOf(histories, levelsOf(), 'E', Float64Array.of(1, 0)).total.relativeL2).toBe(0.5);
  });

  it('without the free-space run keeps boundary and lattice together', () => {
    const { free: _, ...histories } = historiesWith({ boundary: 0.01, lattice: 0.03, gridding: 0, quadrature: 0 });
    const budget = budgetOf(histories, levelsOf({ rounding: 1e-6 }), 'E');
    expect(budget.boundary).toBeNull();
    expect(budget.lattice).toBeNull();
    expect(budget.boundaryAndLattice!.relativeL2).toBeCloseTo(0.04, 12);
    expect(budget.boundaryAndLattice!.share).toBeCloseTo(1, 12);
    expect(partSignals(histories).boundary).toBeUndefined();
    expect(boundaryLevel(histories, levelsOf(), 'E', [0])).toBeNull();
  });

  it('has floors relative to the exact field: amplitude over its root mean square', () => {
    // A vector of constant length 5; floors add as bounds: boundary 2·0.01 + 0.005, quadrature 0.002.
    const steady = fieldOf(3, 50, (_, c) => [3, 4, 0][c % 3]!);
    const levels = levelsOf({ rounding: 0.01, truncation: 0.005, gridded: 0.001, computed: 0.002, exact: 0.002 });
    const budget = budgetOf(
      { grid: steady, free: steady, gridded: steady, computed: steady, exact: steady },
      levels,
      'E',
    );
    expect(budget.boundary!.floor).toBeCloseTo(0.025 / 5, 14);
    expect(budget.lattice!.floor).toBeCloseTo(0.016 / 5, 14);
    expect(budget.gridding.floor).toBeCloseTo(0.003 / 5, 14);
    expect(budget.quadrature.floor).toBeCloseTo(0.002 / 5, 14);
    expect(budget.total.floor).toBeCloseTo(0.012 / 5, 14);
    expect(budget.total.share).toBeNaN();
  });

  it('parts add up to grid − exact sample by sample', () => {
    const histories = historiesWith({ boundary: 0.2, lattice: -0.7, gridding: 0.05, quadrature: 1e-6 });
    const { boundary, lattice, gridding, quadrature } = partSignals(histories);
    histories.grid.values.forEach((g, i) => {
      const parts = boundary!.values[i]! + lattice!.values[i]! + gridding.values[i]! + quadrature.values[i]!;
      // Seven roundings of numbers no larger than 2·7.
      expect(Math.abs(parts - (g - exact.values[i]!))).toBeLessThanOrEqual(7 * Number.EPSILON * 14);
    });
  });

  it('names the worst boundary level of several observers', () => {
    const free = exact;
    const grid = { ...exact, values: exact.values.slice() };
    const n = 150;
    grid.values[(1 * 6 + 0) * n + 140]! += 0.4; // point 1 has a peak of 2 + 1 + 1 = 4 in Ez
    const histories = { grid, free, gridded: exact, computed: exact, exact };
    const level = boundaryLevel(histories, levelsOf({ rounding: 1e-4 }), 'E', [0, 1])!;
    expect(level.peak).toBeCloseTo(0.1, 12);
    expect(level.floor).toBeCloseTo(2e-4 / 4, 12);
  });
});
