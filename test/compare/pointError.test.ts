import { describe, expect, it } from 'vitest';
import { pointError, pointErrors } from '../../src/compare/pointError.ts';
import { fieldOf, gaussian, levelsOf, scaled } from './synthetic.ts';

const exact = fieldOf(3, 100, (p, c, t) => (p + 1) * (c % 3 === 0 ? 3 : 1) * gaussian(t, 50, 8));

describe('point error', () => {
  it('of a field 7 % too strong is 0.07 at every point', () => {
    const grid = scaled(exact, 1.07);
    for (const p of [0, 1, 2]) expect(pointError(grid, exact, exact, 'E', p)).toBeCloseTo(0.07, 12);
  });

  it('counts only a window that covers the last arrival', () => {
    // The last E instant is 100, the last H instant 100.5.
    const arrivals = Float64Array.of(99, 100.2, 101);
    const E = pointErrors(exact, exact, exact, 'E', arrivals, levelsOf());
    const H = pointErrors(exact, exact, exact, 'H', arrivals, levelsOf());
    expect(E.status).toEqual(['counted', 'window too short', 'window too short']);
    expect(H.status).toEqual(['counted', 'counted', 'window too short']);
    expect(E.error[1]).toBeNaN();
  });

  it('counts only fields 20 dB above every floor', () => {
    // Root mean square of the vector: 1, 2, 3 times that at point 0.
    const n = 100;
    const square = exact.values.slice(0, 3 * n).reduce((s, v) => s + v * v, 0) / n;
    const rms = Math.sqrt(square);
    const levels = levelsOf({ exact: 0.15 * rms }); // 10 × 0.15 = 1.5: between points 0 and 1
    expect(pointErrors(exact, exact, exact, 'E', new Float64Array(3), levels).status).toEqual([
      'below floor',
      'counted',
      'counted',
    ]);
  });

  it('never counts a field that vanishes', () => {
    const zero = fieldOf(1, 10, () => 0);
    expect(pointErrors(zero, zero, zero, 'H', new Float64Array(1), levelsOf()).status).toEqual(['below floor']);
  });
});
