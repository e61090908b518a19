import { describe, expect, test } from 'vitest';
import { type SurfaceLine, surfaceLine, surfaceOf } from '../../src/derived/nearToFar.ts';
import { energySpectrum } from '../../src/derived/radiation.ts';
import { evenDirections, overSphere } from '../../src/derived/sphere.ts';
import { log } from '../../src/elementary/elementary.ts';
import { marchAlone } from '../../src/fdtd/run.ts';
import { farPhasorOf, squareOf } from '../../src/retarded/farPhasor.ts';
import { exactHistory } from '../../src/retarded/history.ts';
import { boxProblem, sampleInterval } from '../../src/run/question.ts';
import type { Source, Vec3 } from '../../src/scenario/model.ts';
import { instantsOf, samplePoints } from '../../src/trace/trace.ts';
import { centreFed, dipole, loop, smooth, travelling, unipolar, vacuum, wire } from '../retarded/sources.ts';
import { asked } from './solveHere.ts';

/** The dipole lies on a node of every grid: gridding errs with where in its cell a source is. */
const scenario = (millimetres: number) => ({
  sources: [
    {
      type: 'dipole',
      name: 'element',
      at: [0, 0, 0],
      direction: [0.48, 0.6, 0.64],
      length: '10 mm',
      current: { waveform: { type: 'gaussianDerivative', amplitude: '1 A', delay: '1.8 ns', sigma: '0.2 ns' } },
    },
  ],
  grid: {
    cellSize: `${millimetres} mm`,
    box: { from: ['-96 mm', '-96 mm', '-96 mm'], to: ['96 mm', '96 mm', '96 mm'] },
  },
  duration: '5 ns',
});

const SIDE = 0.24;
const origin: Vec3 = [-0.11, -0.12, -0.13];

/** The transform of the exact field on a box of `cells` cells each way, and what it should give. */
function transformed(sources: readonly Source[], cells: number, frequency: number, stations = 24) {
  const h = SIDE / cells;
  const surface = surfaceOf([cells, cells, cells], [h, h, h], cells / 12, stations);
  const points = samplePoints(surface.cells, origin, [h, h, h]);
  // Five reads a period of 3 GHz, long enough for the pulse to pass.
  const instants = instantsOf(80, 5e-11);
  const { values } = exactHistory(sources, vacuum, points, instants);
  const { far, outflow } = surfaceLine(surface, { points, instants, values }, vacuum, frequency);
  const exact = farPhasorOf(sources, vacuum, 'pulse');
  const directions = evenDirections(60);
  const largest = Math.sqrt(Math.max(...directions.map((n) => squareOf(exact(n, frequency)))));
  let worst = 0;
  for (const n of directions) {
    const found = far(n);
    const off = exact(n, frequency).values.reduce(
      (sum, [re, im], a) => sum + (re - found[a]![0]) ** 2 + (im - found[a]![1]) ** 2,
      0,
    );
    worst = Math.max(worst, Math.sqrt(off) / largest);
  }
  return {
    pattern: worst,
    outflow: outflow / energySpectrum(sources, vacuum)(frequency).value - 1,
    points: points.count,
  };
}

type Found = ReturnType<typeof transformed>;

describe('near-to-far transform of the exact field on a box', () => {
  const kinds: readonly (readonly [string, Source[]])[] = [
    ['dipole', [dipole([0.02, -0.01, 0], [0.48, 0.6, 0.64], 1e-3, smooth)]],
    ['centre-fed wire', centreFed([0, 0, 0], [0.48, 0.36, 0.8], 0.04, smooth)],
    [
      'wave that leaves charge',
      [
        wire(
          [
            [0, 0, -0.03],
            [0.02, 0.01, 0.03],
          ],
          travelling(0.7),
          unipolar,
        ),
      ],
    ],
    ['loop', [loop([0, 0.02, 0], [0.6, 0, 0.8], 0.03, smooth)]],
  ];

  test('is right to second order in the cell', () => {
    const rows = kinds.map(([kind, sources]) => {
      const [coarse, fine] = [48, 96].map((cells) => transformed(sources, cells, 1.2e9)) as [Found, Found];
      return {
        kind,
        'pattern, 50 cells a wavelength': coarse.pattern,
        '100 cells': fine.pattern,
        order: log(coarse.pattern / fine.pattern) / Math.LN2,
        'outflow, 50 cells': coarse.outflow,
        '100 cells ': fine.outflow,
        'order ': log(coarse.outflow / fine.outflow) / Math.LN2,
      };
    });
    console.table(rows);
    for (const row of rows) {
      // The mean of H half a cell to either side: (kh)²/8 = 2e-3 of H at most, half of the far field being H's.
      expect(row['pattern, 50 cells a wavelength'], row.kind).toBeLessThan(2e-3);
      for (const order of [row.order, row['order ']]) {
        expect(order, row.kind).toBeGreaterThan(1.9);
        expect(order, row.kind).toBeLessThan(2.1);
      }
    }
  });

  test('the grid’s far field errs with the square of the cell, and carries the energy that leaves through the surface', () => {
    const rows = [6, 3].map((millimetres) => {
      const question = asked(scenario(millimetres));
      const { grid, sources, medium } = question.scenario;
      const surface = surfaceOf(grid.cells, grid.cellSize, 12 / millimetres, 24);
      const every = sampleInterval(question);
      const instants = instantsOf(question.steps, question.timeStep, every);
      const points = samplePoints(surface.cells, grid.box.from, grid.cellSize);
      const run = marchAlone(boxProblem(question, [{ cell: surface.cells, every }]));
      const exact = exactHistory(sources, medium, points, instants).values;
      const frequency = 1.5e9;
      const [g, x] = [run.samples[0]!, exact].map((values) =>
        surfaceLine(surface, { points, instants, values }, medium, frequency),
      ) as [SurfaceLine, SurfaceLine];
      const known = farPhasorOf(sources, medium, 'pulse');
      const directions = evenDirections(60);
      const largest = Math.sqrt(Math.max(...directions.map((n) => squareOf(known(n, frequency)))));
      const worst = directions.reduce((most, n) => {
        const [a, b] = [g.far(n), x.far(n)];
        const off = a.reduce((sum, [re, im], c) => sum + (re - b[c]![0]) ** 2 + (im - b[c]![1]) ** 2, 0);
        return Math.max(most, Math.sqrt(off) / largest);
      }, 0);
      const far = overSphere((n) => g.far(n).reduce((sum, [re, im]) => sum + re * re + im * im, 0), 0, 1e-6);
      return {
        millimetres,
        'pattern error': worst,
        'far energy / outflow − 1': (2 * far.value) / medium.impedance / g.outflow - 1,
        'outflow / exact − 1': g.outflow / x.outflow - 1,
      };
    });
    console.table(rows);
    const order = log(rows[0]!['pattern error'] / rows[1]!['pattern error']) / Math.LN2;
    console.log(`order ${order.toFixed(2)}`);
    expect(order).toBeGreaterThan(1.9);
    expect(order).toBeLessThan(2.1);
    // What the pattern carries is what leaves, to the second order of both.
    for (const row of rows) {
      const part = 2 * (row.millimetres / 1000 / 0.2) ** 2 * Math.PI ** 2;
      expect(Math.abs(row['far energy / outflow − 1'])).toBeLessThan(part);
    }
  });

  test('samples are bounded however fine the grid', () => {
    const [coarse, fine] = [48, 480].map((cells) => surfaceOf([cells, cells, cells], [1e-3, 1e-3, 1e-3], 2, 16));
    expect(fine!.cells.length / 3).toBeLessThanOrEqual(12 * 16 * 16);
    expect(coarse!.cells.length).toBeLessThanOrEqual(fine!.cells.length);
  });

  test('each face’s weights sum to its area', () => {
    const size: Vec3 = [1e-3, 2e-3, 3e-3];
    const { faces } = surfaceOf([20, 24, 28], size, 3, 12);
    for (const { axis, weights } of faces) {
      const sides = [14 * size[0], 18 * size[1], 22 * size[2]];
      const area = sides[(axis + 1) % 3]! * sides[(axis + 2) % 3]!;
      for (const w of weights) expect(w.reduce((sum, v) => sum + v, 0) / area).toBeCloseTo(1, 12);
    }
  });

  test('a box with too little inside is refused', () => {
    expect(() => surfaceOf([8, 40, 40], [1, 1, 1], 3, 12)).toThrow('needs 10 each way');
  });
});
