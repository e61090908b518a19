import { describe, expect, test } from 'vitest';
import { asin } from '../../src/elementary/elementary.ts';
import { wavenumberError } from '../../src/lattice/dispersion.ts';
import { dispersionError, type FarField, farthestWithin } from '../../src/lattice/farthest.ts';
import { mediumOf } from '../../src/scenario/constants.ts';
import type { Vec3 } from '../../src/scenario/model.ts';
import { timeStepOf } from '../../src/scenario/sites.ts';

const medium = mediumOf(1, 1);
const latticeOf = (cellSize: Vec3, courant: number) => ({
  cellSize,
  timeStep: timeStepOf({ cellSize, courant }, medium),
  medium,
});

/** |ω W| of a Gaussian whose shortest wavelength (−40 dB) is 0.1 m. */
const pulse = (direction: Vec3): FarField => {
  const omega = Float64Array.from({ length: 300 }, (_, m) => m * 8e7);
  return { direction, omega, amplitude: omega.map((w) => w * Math.exp(-0.5 * (w * 1.9e-10) ** 2)) };
};

describe('farthest trusted distance', () => {
  test('one frequency: e(r) = 2 |sin(κr/2)|, so the distance is 2 asin(tolerance/2)/κ', () => {
    const lattice = latticeOf([0.01, 0.01, 0.01], 0.9);
    const omega = 2 * Math.PI * 2e9;
    const kappa = wavenumberError(omega, [1, 0, 0], lattice)!;
    const one = { direction: [1, 0, 0] as Vec3, omega: Float64Array.of(omega), amplitude: Float64Array.of(3) };
    for (const tolerance of [0.001, 0.05, 0.5, 1]) {
      // The search ends within 10⁻⁹ of the tolerance, to which r is nearly proportional.
      const expected = (2 * asin(tolerance / 2)) / kappa;
      expect(Math.abs(farthestWithin(tolerance, one, lattice) / expected - 1)).toBeLessThan(2e-9);
    }
  });

  test('is the first crossing: inside it the error stays below, on it equals the tolerance', () => {
    const lattice = latticeOf([0.008, 0.01, 0.006], 0.99);
    for (const direction of [
      [1, 0, 0],
      [0, 0.6, 0.8],
      [0.48, 0.36, 0.8],
    ] as Vec3[])
      for (const tolerance of [0.01, 0.05, 0.9]) {
        const field = pulse(direction);
        const farthest = farthestWithin(tolerance, field, lattice);
        expect(dispersionError(field, lattice, farthest) / tolerance).toBeCloseTo(1, 8);
        for (let part = 0; part < 1; part += 0.01)
          expect(dispersionError(field, lattice, part * farthest)).toBeLessThan(tolerance);
      }
  });

  test('grows with the square of the refinement', () => {
    const rows: { cells: number; farthest: number; order: number }[] = [];
    for (const cells of [10, 20, 40, 80]) {
      const d = 0.1 / cells;
      const farthest = farthestWithin(0.05, pulse([1, 0, 0]), latticeOf([d, d, d], 0.99));
      const before = rows.at(-1);
      rows.push({ cells, farthest, order: before ? Math.log2(farthest / before.farthest) : Number.NaN });
    }
    console.table(rows);
    // The next order of the relation is (kd)² relative to the leading one; at 10 cells and −40 dB it still shows.
    for (const { order } of rows.slice(1)) {
      expect(order).toBeGreaterThan(1.95);
      expect(order).toBeLessThan(2.15);
    }
  });

  test('exact propagation has no end; energy the lattice does not carry leaves no distance at all', () => {
    const u = Math.sqrt(1 / 3);
    const magic = farthestWithin(0.05, pulse([u, u, u]), latticeOf([0.01, 0.01, 0.01], 1));
    // κ is rounding: 10⁻¹⁶ of k ≈ 50 rad/m.
    expect(magic).toBeGreaterThan(1e12);
    const coarse = latticeOf([0.08, 0.08, 0.08], 0.9);
    expect(farthestWithin(0.05, pulse([1, 0, 0]), coarse)).toBe(0);
    expect(dispersionError(pulse([1, 0, 0]), coarse, 0)).toBeGreaterThan(0.05);
  });

  test('refuses a tolerance that is none, and a far field without energy', () => {
    const lattice = latticeOf([0.01, 0.01, 0.01], 0.9);
    expect(() => farthestWithin(0, pulse([1, 0, 0]), lattice)).toThrow('tolerance is 0');
    expect(() => farthestWithin(1.2, pulse([1, 0, 0]), lattice)).toThrow('at most 1');
    const nothing = { direction: [1, 0, 0] as Vec3, omega: Float64Array.of(1e9), amplitude: Float64Array.of(0) };
    expect(() => farthestWithin(0.05, nothing, lattice)).toThrow('zero at every frequency');
  });
});
