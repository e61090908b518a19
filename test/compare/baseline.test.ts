import { expect, test } from 'vitest';
import { type Baseline, holdAgainst } from '../../src/compare/baseline.ts';

const result = (relativeL2: number | null, peakError = -0.01, name = 'A'): Baseline => ({
  observers: [{ name, E: { relativeL2, peakError, riseTimeError: null }, H: null }],
  norms: { E: { relativeL2: 0.02, relativeLinf: 0.05 }, H: { relativeL2: 0.01, relativeLinf: null } },
});
const grown = (now: Baseline, before: Baseline, allow: number) =>
  holdAgainst(now, before, allow)
    .filter(({ grew }) => grew)
    .map(({ figure }) => figure);

test('a figure may grow by what is allowed and no more; it may shrink; signs do not matter', () => {
  expect(grown(result(0.0104), result(0.01), 0.05)).toEqual([]);
  expect(grown(result(0.0106), result(0.01), 0.05)).toEqual(['observer A, E: relative L2']);
  expect(grown(result(0.005), result(0.01), 0)).toEqual([]);
  expect(grown(result(0.01, 0.02), result(0.01, -0.01), 0.05)).toEqual(['observer A, E: peak error']);
});

test('equal results are held in every figure that has a value, and none grew', () => {
  const held = holdAgainst(result(0.01), result(0.01), 0);
  expect(held.map(({ figure }) => figure)).toEqual([
    'observer A, E: relative L2',
    'observer A, E: peak error',
    'the box, E: relative L2',
    'the box, E: relative L∞',
    'the box, H: relative L2',
  ]);
  expect(held.some(({ grew }) => grew)).toBe(false);
});

test('a figure or an observer that is gone counts as grown; a new one does not', () => {
  expect(grown(result(null), result(0.01), 0.05)).toEqual(['observer A, E: relative L2']);
  expect(grown(result(0.01, 0, 'B'), result(0.01), 0.05)).toContain('observer A, E: relative L2');
  expect(grown(result(0.5), result(null), 0.05)).toEqual([]);
});

test('rounding is no growth', () => {
  expect(grown(result(5e-10), result(1e-12), 0)).toEqual([]);
});
