import { readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import {
  breakLine,
  featureSelective,
  GRADES,
  gradeOf,
  measureOf,
  partsOf,
} from '../../src/compare/featureSelective.ts';

const N = 256;
const wave = (amplitude: number, line: number, trend = 0) =>
  Float64Array.from({ length: N }, (_, n) => trend + amplitude * Math.cos((2 * Math.PI * line * n) / N));

describe('feature selective validation', () => {
  it('is nothing for equal curves, and the same both ways round', () => {
    const a = wave(1, 9, 0.3);
    const same = featureSelective(a, a, 'Ez');
    for (const key of ['ADM', 'FDM', 'GDM'] as const) {
      expect(same[key].total).toBe(0);
      expect(same[key].grade).toBe('excellent');
    }
    const b = wave(0.8, 11, 0.25);
    const [there, back] = [featureSelective(a, b, 'Ez'), featureSelective(b, a, 'Ez')];
    for (const key of ['ADM', 'FDM', 'GDM'] as const) expect(there[key].total).toBeCloseTo(back[key].total, 12);
  });

  it('of two constants 3 and 1 has ADM = r e^r, r = (3 − 1)/(3 + 1), and no FDM', () => {
    const found = featureSelective(wave(0, 1, 3), wave(0, 1, 1), 'Ez');
    console.log(`ADM ${found.ADM.total}, by hand ${0.5 * Math.exp(0.5)}`);
    // Rounding of sums over 256 points.
    expect(Math.abs(found.ADM.total - 0.5 * Math.exp(0.5))).toBeLessThan(N * Number.EPSILON);
    expect(found.FDM.total).toBe(0);
    expect(found.ADM.grade).toBe('poor');
  });

  it('of one low line with amplitudes 3 and 1 has mean ADM (3 − 1)/(3 + 1) and mean FDM 2 · ½ of the same', () => {
    // Line 12: the break is at 12 + 5, and its fade begins at 14, so that the line is in the low part entirely.
    const [a, b] = [wave(3, 12), wave(1, 12)];
    expect(breakLine(a)).toBe(17);
    const found = featureSelective(a, b, 'Ez');
    console.log(`ADM ${found.ADM.total}, FDM ${found.FDM.total}, by hand 0.5 and 0.5`);
    expect(Math.abs(found.ADM.total - 0.5)).toBeLessThan(1e-12);
    expect(Math.abs(found.FDM.total - 0.5)).toBeLessThan(1e-12);
  });

  it('splits a signal into parts whose sum it is', () => {
    const a = Float64Array.from({ length: 201 }, (_, n) => Math.exp(-((n - 60) ** 2) / 50) + 0.1);
    const { trend, low, high } = partsOf(a, breakLine(a));
    a.forEach((v, n) => {
      expect(Math.abs(trend[n]! + low[n]! + high[n]! - v)).toBeLessThan(1e-13);
    });
  });

  it('agrees with an independent computation', () => {
    const oracle = JSON.parse(readFileSync(new URL('../oracle/fsv.json', import.meta.url), 'utf8')) as Record<
      string,
      { a: number[]; b: number[]; ADM: number; FDM: number; GDM: number; break: number }
    >;
    for (const [name, { a, b, ...expected }] of Object.entries(oracle)) {
      const [one, two] = [Float64Array.from(a), Float64Array.from(b)];
      const found = featureSelective(one, two, 'Ez');
      console.log(
        `${name.padEnd(26)} ADM ${found.ADM.total.toFixed(6)} FDM ${found.FDM.total.toFixed(6)} GDM ${found.GDM.total.toFixed(6)} ${found.GDM.grade}`,
      );
      expect(Math.min(breakLine(one), breakLine(two))).toBe(expected.break);
      // Parts below 10⁻⁹ of the peak count as nothing: that is what the two may differ by.
      for (const key of ['ADM', 'FDM', 'GDM'] as const)
        expect(Math.abs(found[key].total - expected[key])).toBeLessThan(1e-7);
    }
  });

  it('grades as the standard does, and counts grades and spread', () => {
    expect([0, 0.099, 0.1, 0.2, 0.4, 0.8, 1.6].map(gradeOf)).toEqual([
      'excellent',
      'excellent',
      'very good',
      'good',
      'fair',
      'poor',
      'very poor',
    ]);
    // 1 excellent, 6 good, 2 fair, 1 very poor: excellent to fair hold 90 %, good and fair with one neighbour 80 to 90 %.
    const points = Float64Array.of(0.05, 0.3, 0.3, 0.3, 0.3, 0.3, 0.3, 0.5, 0.5, 2);
    const { histogram, gradeCount, spread, total } = measureOf(points);
    expect(histogram).toEqual([0.1, 0, 0.6, 0.2, 0, 0.1]);
    expect(gradeCount).toBe(GRADES.indexOf('fair') + 1);
    expect(spread).toBe(4);
    expect(total).toBeCloseTo(0.485, 12);
  });

  it('refuses curves of different length', () => {
    expect(() => featureSelective(wave(1, 4), new Float64Array(20), 'Ez')).toThrow(/equally many/);
  });
});
