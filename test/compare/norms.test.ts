import { describe, expect, it } from 'vitest';
import { relativeL1, relativeL2, relativeLinf } from '../../src/compare/norms.ts';
import { fieldOf, gaussian, scaled } from './synthetic.ts';

const exact = fieldOf(4, 200, (p, c, t) => (c + 1) * (p + 1) * gaussian(t, 100, 15));

// Scaling rounds each sample by at most half an ulp of 1.03; the difference 0.03 then holds to EPSILON/0.03.
const ROUNDING = (2 * Number.EPSILON) / 0.03;

describe('relative norms', () => {
  const grid = scaled(exact, 1.03);

  it.each(['E', 'H'] as const)('of %s scaled by 1.03 are 0.03 in every norm', (field) => {
    for (const norm of [relativeL1, relativeL2, relativeLinf])
      expect(Math.abs(norm(grid, exact, field).value / 0.03 - 1)).toBeLessThan(ROUNDING);
  });

  it('state unit, samples and scale', () => {
    const H = relativeL2(grid, exact, 'H');
    expect(H.unit).toBe('A/m');
    expect(H.samples).toBe(4 * 3 * 200);
    // A constant field of components 3, 4, 0: mean 7/3, root mean square 5/√3, peak 4.
    const constant = fieldOf(2, 10, (_, c) => [3, 4, 0][c % 3]!);
    expect(relativeL1(constant, constant, 'E').scale).toBeCloseTo(7 / 3, 14);
    expect(relativeL2(constant, constant, 'E').scale).toBeCloseTo(5 / Math.sqrt(3), 14);
    expect(relativeLinf(constant, constant, 'E').scale).toBe(4);
  });

  it('tell L1, L2 and L∞ apart on one wrong sample among N', () => {
    // |difference| = d once, |exact| = 1 in each of 3·N samples: L1 = d/3N, L2 = d/√(3N), L∞ = d.
    const ones = fieldOf(1, 12, () => 1);
    const spoilt = { ...ones, values: ones.values.slice() };
    spoilt.values[12 + 5]! += 0.5;
    expect(relativeL1(spoilt, ones, 'E').value).toBeCloseTo(0.5 / 36, 15);
    expect(relativeL2(spoilt, ones, 'E').value).toBeCloseTo(0.5 / 6, 15);
    const Linf = relativeLinf(spoilt, ones, 'E');
    expect(Linf.value).toBe(0.5);
    expect(Linf).toMatchObject({ component: 'Ey', point: 0, at: [0, 0.5, 0], time: 6 });
  });

  it('weigh points by the cells they stand for and leave out weight 0', () => {
    const unlike = fieldOf(4, 200, (p, c, t) => (c + 1) * (p + 1) * gaussian(t, 100, 15) * (p === 2 ? 2 : 1));
    // Only point 2 is wrong, by its own size; its energy is 9 of 1 + 4 + 9 + 16, weighted 9w of 21 + 9w.
    expect(relativeL2(unlike, exact, 'E').value).toBeCloseTo(Math.sqrt(9 / 30), 14);
    expect(relativeL2(unlike, exact, 'E', Float64Array.of(1, 1, 5, 1)).value).toBeCloseTo(Math.sqrt(45 / 66), 14);
    const without = relativeL2(unlike, exact, 'E', Float64Array.of(1, 1, 0, 1));
    expect(without.value).toBe(0);
    expect(without.samples).toBe(3 * 3 * 200);
  });

  it('refuse fields sampled differently', () => {
    expect(() =>
      relativeL2(
        fieldOf(4, 199, () => 1),
        exact,
        'E',
      ),
    ).toThrow(/exact has 4 points at 200 instants, grid has 4 at 199/);
  });
});

describe('standard error of a sampled norm', () => {
  it('is that of a stratified ratio: two strata worked by hand', () => {
    // One component and instant a point: exact 1; differences 0, 2 in a stratum of 10 cells and 1, 1 in one of 2 cells.
    const one = fieldOf(4, 1, (_, c) => (c === 0 ? 1 : 0));
    const grid = fieldOf(4, 1, (p, c) => (c === 0 ? 1 + [0, 2, 1, 1][p]! : 0));
    const weights = Float64Array.of(5, 5, 1, 1);
    const strata = { of: Int32Array.of(0, 0, 1, 1), cells: Float64Array.of(10, 2) };
    const norm = relativeL2(grid, one, 'E', weights, strata);
    // A = 5·0 + 5·4 + 1 + 1 = 22, B = 12, r = 22/12; z = w(a − r): stratum 0 has 5(0 − r), 5(4 − r), spread (20)²/2.
    // var r = (1 − 2/10)·2·200/144; stratum 1 is complete and adds nothing.
    const variance = (0.8 * 2 * 200) / 144;
    expect(norm.value).toBeCloseTo(Math.sqrt(22 / 12), 14);
    expect(norm.standardError).toBeCloseTo(Math.sqrt(variance) / (2 * norm.value), 14);
  });

  it('is 0 where every cell is a sample', () => {
    const one = fieldOf(3, 1, () => 1);
    const grid = fieldOf(3, 1, (p) => 1 + p);
    const strata = { of: Int32Array.of(0, 0, 0), cells: Float64Array.of(3) };
    expect(relativeL2(grid, one, 'E', undefined, strata).standardError).toBe(0);
  });
});
