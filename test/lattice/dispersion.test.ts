import { describe, expect, test } from 'vitest';
import { asin, sin } from '../../src/elementary/elementary.ts';
import {
  cutoffWavenumber,
  leadingWavenumberError,
  numericalWavenumber,
  wavenumberError,
} from '../../src/lattice/dispersion.ts';
import type { Lattice } from '../../src/lattice/lattice.ts';
import { mediumOf } from '../../src/scenario/constants.ts';
import type { Vec3 } from '../../src/scenario/model.ts';
import { timeStepOf } from '../../src/scenario/sites.ts';

const medium = mediumOf(2.2, 1);
const latticeOf = (cellSize: Vec3, courant: number): Lattice => ({
  cellSize,
  timeStep: timeStepOf({ cellSize, courant }, medium),
  medium,
});
const turn = (degrees: number): Vec3 => [Math.cos((degrees * Math.PI) / 180), Math.sin((degrees * Math.PI) / 180), 0];

const directions: Vec3[] = [];
for (let n = 0; n < 60; n++) {
  const z = -1 + (2 * n + 1) / 60;
  const phi = n * 2.399963;
  directions.push([Math.sqrt(1 - z * z) * Math.cos(phi), Math.sqrt(1 - z * z) * Math.sin(phi), z]);
}

describe('the Yee dispersion relation', () => {
  test('phase velocity in the plane with vΔt = d/2: 0.9873 v at 10 cells a wavelength along an axis, 0.9969 v at 20', () => {
    // Taflove & Hagness, Computational Electrodynamics, 3rd ed., ch. 4: −1.27 % and −0.31 % along the axes, and
    // anisotropy from there to the diagonal (from memory); on axis and diagonal the relation has closed forms.
    const d = 1e-3;
    const timeStep = d / (2 * medium.speed);
    const lattice: Lattice = { cellSize: [d, d, d], timeStep, medium };
    const rows: Record<string, number | string>[] = [];
    for (const cells of [10, 20]) {
      const omega = (2 * Math.PI * medium.speed) / (cells * d);
      const ratio = (degrees: number) => omega / medium.speed / numericalWavenumber(omega, turn(degrees), lattice)!;
      rows.push({ cells, '0°': ratio(0), '30°': ratio(30), '45°': ratio(45) });
      const half = sin((omega * timeStep) / 2);
      const axis = (2 / d) * asin(2 * half);
      const diagonal = ((2 * Math.SQRT2) / d) * asin(Math.SQRT2 * half);
      // A few roundings of the two sines and the arcsine.
      expect(ratio(0) / (omega / medium.speed / axis) - 1).toBeCloseTo(0, 14);
      expect(ratio(45) / (omega / medium.speed / diagonal) - 1).toBeCloseTo(0, 14);
      expect(ratio(30)).toBeGreaterThan(ratio(0));
      expect(ratio(30)).toBeLessThan(ratio(45));
    }
    console.table(rows);
    expect(rows[0]!['0°']).toBeCloseTo(0.9873, 4);
    expect(rows[1]!['0°']).toBeCloseTo(0.9969, 4);
    expect(rows[0]!['45°']).toBeCloseTo(0.9958, 4);
  });

  test('holds for unequal cells in every direction, up to the cut-off', () => {
    const lattice = latticeOf([1e-3, 1.7e-3, 0.6e-3], 0.9);
    let worst = 0;
    let propagating = 0;
    for (const u of directions)
      for (const omegaStep of [0.01, 0.3, 1, 1.5, 2, 2.5, 3, 3.14]) {
        const omega = omegaStep / lattice.timeStep;
        const k = numericalWavenumber(omega, u, lattice);
        if (k === undefined) continue;
        propagating++;
        const right = u.reduce(
          (s, c, a) => s + (sin((k * c * lattice.cellSize[a]!) / 2) / lattice.cellSize[a]!) ** 2,
          0,
        );
        const left = (sin(omegaStep / 2) / (medium.speed * lattice.timeStep)) ** 2;
        worst = Math.max(worst, Math.abs(right / left - 1));
        expect(k).toBeLessThanOrEqual(cutoffWavenumber(u, lattice.cellSize));
      }
    console.log(`${propagating} waves, worst residual ${worst.toExponential(1)}`);
    expect(propagating).toBeGreaterThan(200);
    // Each side is a few roundings; near the maximum of the right-hand side no k can do better.
    expect(worst).toBeLessThan(32 * Number.EPSILON);
  });

  test('nothing propagates above the cut-off: along an axis sin(ωΔt/2) = vΔt/d', () => {
    const lattice = latticeOf([1e-3, 1.7e-3, 0.6e-3], 0.9);
    for (const axis of [0, 1, 2]) {
      const u = [0, 1, 2].map((a) => (a === axis ? 1 : 0)) as unknown as Vec3;
      const d = lattice.cellSize[axis]!;
      expect(cutoffWavenumber(u, lattice.cellSize)).toBeCloseTo(Math.PI / d, 6);
      const ratio = (medium.speed * lattice.timeStep) / d;
      const cutoff = (2 / lattice.timeStep) * asin(ratio);
      expect(numericalWavenumber(cutoff * (1 - 1e-9), u, lattice)! * d).toBeCloseTo(Math.PI, 3);
      expect(numericalWavenumber(cutoff * (1 + 1e-9), u, lattice)).toBeUndefined();
    }
    // A sampled time cannot carry more than half a turn a step.
    expect(numericalWavenumber(3.2 / lattice.timeStep, turn(20), lattice)).toBeUndefined();
  });

  test('the magic time step: along the diagonal of a cubic lattice at S = 1 every frequency travels at v', () => {
    const lattice = latticeOf([1e-3, 1e-3, 1e-3], 1);
    const u = Math.sqrt(1 / 3);
    for (const omegaStep of [0.1, 1, 2, 3]) {
      const omega = omegaStep / lattice.timeStep;
      const k = numericalWavenumber(omega, [u, u, u], lattice)!;
      // S, Δt and the direction are rounded; towards the maximum of the relation k amplifies them as tan.
      expect(Math.abs((k * medium.speed) / omega - 1)).toBeLessThan(64 * Number.EPSILON);
    }
  });

  test('k_num − k approaches its leading order quadratically', () => {
    const lattice = latticeOf([1e-3, 1.7e-3, 0.6e-3], 0.8);
    const rows: { cells: number; departure: number; order: number }[] = [];
    for (const cells of [10, 20, 40, 80]) {
      const omega = (2 * Math.PI * medium.speed) / (cells * 1.7e-3);
      let departure = 0;
      for (const u of directions) {
        const k = omega / medium.speed;
        const leading = leadingWavenumberError(k, u, lattice);
        departure = Math.max(departure, Math.abs(wavenumberError(omega, u, lattice)! - leading) / k);
      }
      const before = rows.at(-1);
      rows.push({ cells, departure, order: before ? Math.log2(before.departure / departure) : Number.NaN });
    }
    console.table(rows);
    // (k_num − k)/k is even in the cell size: after second order comes fourth.
    for (const { order } of rows.slice(1)) {
      expect(order).toBeGreaterThan(3.9);
      expect(order).toBeLessThan(4.2);
    }
  });
});
