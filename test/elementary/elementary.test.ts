import { describe, expect, test } from 'vitest';
import {
  asin,
  atan2,
  cos,
  decibels,
  exp,
  expm1,
  fromDecibels,
  log,
  log1p,
  pow,
  sin,
} from '../../src/elementary/elementary.ts';
import { faddeeva, scaledErfc } from '../../src/elementary/faddeeva.ts';
import reference from '../oracle/elementary.json' with { type: 'json' };

/** The distance between two doubles in units in the last place of the reference. */
function ulps(value: number, exact: number): number {
  if (value === exact) return 0;
  const bits = new DataView(new ArrayBuffer(8));
  bits.setFloat64(0, Math.abs(exact));
  bits.setBigInt64(0, bits.getBigInt64(0) + 1n);
  return Math.abs(value - exact) / (bits.getFloat64(0) - Math.abs(exact));
}

// test/oracle/waveforms.py, 50 digits. One unit: the reference is itself rounded, and the library's own bound is below 1.
describe('elementary functions are within one unit in the last place', () => {
  const functions = { exp, log, expm1, log1p, sin, cos, asin, atan2, pow };
  for (const [name, given] of Object.entries(functions)) {
    test(name, () => {
      const f = given as (...x: number[]) => number;
      const worst = reference[name as keyof typeof functions]
        .map((row) => ({ row, ulps: ulps(f(...row.slice(0, -1)), row.at(-1)!) }))
        .reduce((a, b) => (b.ulps > a.ulps ? b : a));
      console.log(`${name}: ${worst.ulps.toFixed(2)} ulp at ${worst.row.slice(0, -1)}`);
      expect(worst.ulps).toBeLessThanOrEqual(1);
    });
  }
});

test('special values are those of IEEE 754', () => {
  expect([exp(0), exp(-Infinity), exp(Infinity), log(1), log(0)]).toEqual([1, 0, Infinity, 0, -Infinity]);
  expect([sin(0), cos(0), atan2(0, -1), atan2(-0, -1), pow(2, 10)]).toEqual([0, 1, Math.PI, -Math.PI, 1024]);
  expect([log(-1), sin(Infinity), exp(Number.NaN)].every(Number.isNaN)).toBe(true);
});

test('decibels and back', () => {
  expect(decibels(0)).toBe(-Infinity);
  // 20 log₁₀ 10 = 20 and 10^(−40/20) = 0.01 to a few roundings
  expect(Math.abs(decibels(10) - 20)).toBeLessThan(20 * 4 * Number.EPSILON);
  expect(Math.abs(fromDecibels(-40) - 0.01)).toBeLessThan(0.01 * 8 * Number.EPSILON);
});

test('complex error function in the closed upper half plane', () => {
  const out = new Float64Array(2);
  let worst = 0;
  for (const [x, y, re, im] of reference.faddeeva as [number, number, number, number][]) {
    faddeeva(x, y, out);
    worst = Math.max(worst, Math.hypot(out[0]! - re, out[1]! - im) / Math.hypot(re, im));
    if (x === 0) expect(Math.abs(scaledErfc(y) - re)).toBeLessThanOrEqual(8 * Number.EPSILON * re);
  }
  console.log(`faddeeva: ${(worst / Number.EPSILON).toFixed(1)} ε relative to |w|`);
  // Twelve terms of order 1, each with about three roundings, and e^(−z²) whose exponent is rounded at |z|² ≤ 36.
  expect(worst).toBeLessThan(16 * Number.EPSILON);
});
