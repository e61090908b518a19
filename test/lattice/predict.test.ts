import { describe, expect, test } from 'vitest';
import { predictGridField, predictLatticeError } from '../../src/lattice/predict.ts';
import { predictGridFieldBySpectrum, predictLatticeErrorBySpectrum } from '../../src/lattice/spectral.ts';
import { staticGreen } from '../../src/lattice/static.ts';
import type { Vec3 } from '../../src/scenario/model.ts';
import { instantsOf, samplePoints } from '../../src/trace/trace.ts';
import { type CaseSpec, latticeCase, minus, normOf } from './cases.ts';
import { griddedField, historyOf } from './exactFields.ts';
import { yeeField } from './yeeReference.ts';

const base: CaseSpec = {
  source: 'dipole',
  cellSize: [1e-3, 1.3e-3, 0.8e-3],
  relativePermittivity: 2,
  relativePermeability: 1.5,
  courant: 0.9,
  cellsPerWavelength: 10,
  speed: 1,
  wireLength: 8,
  waveform: 'gaussianDerivative',
  lead: 9,
  observers: [
    [6, -3, 4],
    [-2, 9, 7],
  ],
};

/** Largest |a − b| of E or H over the largest |b| of the same kind. */
function farApart(a: Float64Array, b: Float64Array, count: number): number {
  let worst = 0;
  for (const first of [0, 3]) {
    let difference = 0;
    let scale = 0;
    for (let n = 0; n < a.length; n++) {
      const site = Math.floor(n / count) % 6;
      if (site < first || site > first + 2) continue;
      difference = Math.max(difference, Math.abs(a[n]! - b[n]!));
      scale = Math.max(scale, Math.abs(b[n]!));
    }
    worst = Math.max(worst, difference / scale);
  }
  return worst;
}

describe('predictions of the lattice', () => {
  test("show the field of Yee's scheme, E and H, unequal cells, εr 2, μr 1.5", () => {
    const c = latticeCase({ ...base, cellsPerWavelength: 8, lead: 5, observers: [[8, -5, 6]] });
    const edges = c.gridded.edges;
    const args = [edges, c.lattice, c.points, c.instants] as const;
    const grid = yeeField(...args);
    const measured = minus(
      grid,
      historyOf(griddedField(edges, c.lattice.cellSize, c.lattice.medium), c.points, c.instants),
    );
    const rows = ([0, 3] as const).map((first) => {
      const size = (values: Float64Array) => normOf(values, c.instants.count, 0, first);
      return {
        field: first === 0 ? 'E' : 'H',
        'measured, %': (100 * size(measured)) / size(grid),
        time: size(predictLatticeError(...args)) / size(measured),
        spectrum: size(predictLatticeErrorBySpectrum(...args)) / size(measured),
        'time, left': size(minus(predictLatticeError(...args), measured)) / size(measured),
        'spectrum, left': size(minus(predictLatticeErrorBySpectrum(...args), measured)) / size(measured),
      };
    });
    console.table(rows);
    for (const row of rows) {
      expect(Math.abs(row.time - 1)).toBeLessThan(0.1);
      expect(Math.abs(row.spectrum - 1)).toBeLessThan(0.05);
      // The error is predicted as a signal, not only in size: what is left is of the next order, (h/r)² ≈ 3 %.
      expect(row['time, left']).toBeLessThan(0.1);
      expect(row['spectrum, left']).toBeLessThan(0.1);
    }
  });

  test('lattice error = field − filaments, but for the fourth order', () => {
    const rows: { refine: number; time: number; spectrum: number; order: number }[] = [];
    for (const refine of [1, 2, 4]) {
      const c = latticeCase({
        ...base,
        source: 'edge',
        cellSize: base.cellSize.map((d) => d / refine) as unknown as Vec3,
        cellsPerWavelength: 10 * refine,
        observers: [[4 * refine, -3 * refine, 4 * refine]],
      });
      const edges = c.gridded.edges;
      const args = [edges, c.lattice, c.points, c.instants] as const;
      const filaments = historyOf(griddedField(edges, c.lattice.cellSize, c.lattice.medium), c.points, c.instants);
      const off = (field: typeof predictGridField, error: typeof predictGridField) =>
        farApart(minus(field(...args), error(...args)), filaments, c.instants.count);
      const time = off(predictGridField, predictLatticeError);
      const spectrum = off(predictGridFieldBySpectrum, predictLatticeErrorBySpectrum);
      const before = rows.at(-1);
      rows.push({ refine, time, spectrum, order: before ? Math.log2(before.time / time) : Number.NaN });
    }
    console.table(rows);
    for (const { order } of rows.slice(1)) {
      // Sites move by fractions of a cell as the lattice is refined.
      expect(order).toBeGreaterThan(3.4);
      expect(order).toBeLessThan(4.6);
    }
  });

  test('the two forms approach each other with order 4: the time form leaves out the square of the phase error', () => {
    const rows: { cells: number; apart: number; order: number }[] = [];
    for (const refine of [1, 2, 4]) {
      const c = latticeCase({
        ...base,
        cellSize: base.cellSize.map((d) => d / refine) as unknown as Vec3,
        cellsPerWavelength: 10 * refine,
        observers: [[24 * refine, -18 * refine, 24 * refine]],
      });
      const args = [c.gridded.edges, c.lattice, c.points, c.instants] as const;
      const time = predictGridField(...args);
      const difference = minus(time, predictGridFieldBySpectrum(...args));
      const apart = normOf(difference, c.instants.count, 0, 0) / normOf(time, c.instants.count, 0, 0);
      const before = rows.at(-1);
      rows.push({ cells: 10 * refine, apart, order: before ? Math.log2(before.apart / apart) : Number.NaN });
    }
    console.table(rows);
    for (const { order } of rows.slice(1)) {
      expect(order).toBeGreaterThan(3.8);
      expect(order).toBeLessThan(4.2);
    }
  });

  test("what a pulse with a net charge leaves behind is the charge times the lattice's static field", () => {
    const c = latticeCase({ ...base, source: 'edge', waveform: 'gaussian', observers: [[5, -2, 3]] });
    const edges = c.gridded.edges;
    const waveform = edges.waveforms[0]!;
    // Long after: 25 sigma, the pulse being over at 14.
    const late = 25 * waveform.timeScale;
    const step = c.lattice.timeStep;
    const instants = {
      count: 3,
      E: Float64Array.of(late, late + step, late + 2 * step),
      H: Float64Array.of(late, late + step, late + 2 * step),
    };
    const { at } = staticGreen(c.lattice.cellSize);
    const charge = edges.weight[0]! * waveform.finalCharge;
    const dz = c.lattice.cellSize[2];
    const expected = (charge * (at(5, -2, 4) - 2 * at(5, -2, 3) + at(5, -2, 2))) / dz / c.lattice.medium.permittivity;
    const slope =
      (charge * (at(6, -2, 3) - at(5, -2, 3) - at(6, -2, 2) + at(5, -2, 2))) /
      c.lattice.cellSize[0] /
      c.lattice.medium.permittivity;
    for (const predict of [predictGridField, predictGridFieldBySpectrum]) {
      const values = predict(edges, c.lattice, c.points, instants);
      // Differences of the table amplify its rounding by (r/h)² ≈ 50.
      expect(Math.abs(values[2 * 3]! / expected - 1)).toBeLessThan(256 * Number.EPSILON);
      expect(Math.abs(values[0]! / slope - 1)).toBeLessThan(256 * Number.EPSILON);
    }
  });

  test('instants may be strided; no current gives no field', () => {
    const c = latticeCase(base);
    const args = [c.gridded.edges, c.lattice, c.points] as const;
    const every = instantsOf(c.instants.count, c.lattice.timeStep, 3);
    const first = c.instants.count - 1 - (every.count - 1) * 3;
    for (const predict of [predictGridField, predictLatticeError, predictGridFieldBySpectrum]) {
      const all = predict(...args, c.instants);
      const some = predict(...args, every);
      const same = some.map(
        (_, n) => all[Math.floor(n / every.count) * c.instants.count + first + 3 * (n % every.count)]!,
      );
      // The same sums; only the sampled waveforms' instants are rounded differently.
      expect(farApart(some, same, every.count)).toBeLessThan(1e-11);
      const none = { ...c.gridded.edges, count: 0 };
      expect(predict(none, c.lattice, c.points, every).every((x) => x === 0)).toBe(true);
    }
  });

  test('refuses a sample on a driven edge, and instants between steps', () => {
    const c = latticeCase({ ...base, source: 'edge', observers: [[0, 0, 0]] });
    const args = [c.gridded.edges, c.lattice] as const;
    for (const predict of [predictGridField, predictLatticeErrorBySpectrum]) {
      expect(() => predict(...args, c.points, c.instants)).toThrow('lies on a driven edge');
      const beside = samplePoints(Int32Array.of(64, 60, 60), [0, 0, 0], c.lattice.cellSize);
      const uneven = { ...c.instants, E: c.instants.E.map((t) => 1.3 * t) };
      expect(() => predict(...args, beside, uneven)).toThrow('not evenly spaced by whole time steps');
    }
  });
});
