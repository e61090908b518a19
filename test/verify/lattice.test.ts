import { expect, test } from 'vitest';
import { predictLatticeErrorBySpectrum } from '../../src/lattice/spectral.ts';
import { staticGreen } from '../../src/lattice/static.ts';
import { makeWaveform } from '../../src/scenario/waveforms.ts';
import { type CaseSpec, latticeCase, minus, normOf, randomCases } from '../lattice/cases.ts';
import { griddedField, historyOf } from '../lattice/exactFields.ts';
import { measure, type Outcome, print, summary } from '../lattice/measure.ts';
import { yeeField } from '../lattice/yeeReference.ts';

/**
 * Predictions against runs of Yee's scheme in double precision, a seeded sample; the long table is among the stress
 * tests. The bounds are what the two forms are asked for: the time form within 10 % of the measured error, the spectrum
 * within 5 %, five cells or more away at 8 or more cells per shortest wavelength.
 */
test('random sources, lattices, media: predicted against measured error', () => {
  const outcomes: Outcome[] = [];
  for (const spec of randomCases(11, 8, 3, 8, 10.5)) {
    const result = measure(spec);
    print(result);
    outcomes.push(...result.outcomes);
  }
  const time = summary(outcomes, 'time');
  const spectrum = summary(outcomes, 'spectrum');
  console.table({ time, spectrum });
  expect(time['worst factor']).toBeLessThan(1.1);
  expect(spectrum['worst factor']).toBeLessThan(1.05);
  expect(spectrum['median factor']).toBeLessThanOrEqual(time['median factor']);
});

const oneEdge: CaseSpec = {
  source: 'edge',
  cellSize: [1e-3, 1.3e-3, 0.8e-3],
  relativePermittivity: 2,
  relativePermeability: 1.5,
  courant: 0.95,
  cellsPerWavelength: 8,
  speed: 1,
  wireLength: 0,
  waveform: 'gaussian',
  lead: 6,
  observers: [
    [2, 0, 0],
    [0, 0, 3],
    [3, 2, -2],
  ],
};

test('a kinked waveform: the spectrum still tells the size of the error', () => {
  const rows: {
    'rise, steps': number;
    field: string;
    'cells away': number;
    'measured, %': number;
    spectrum: number;
  }[] = [];
  for (const rise of [5, 15]) {
    const c = latticeCase({
      ...oneEdge,
      cellSize: [1e-3, 1e-3, 1e-3],
      observers: [
        [5, 3, 2],
        [12, 0, 4],
        [16, 10, 10],
      ],
    });
    const beta = 1 / (rise * c.lattice.timeStep);
    const waveform = makeWaveform({ type: 'doubleExponential', amplitude: 1, alpha: beta / 20, beta });
    const edges = { ...c.gridded.edges, waveforms: [waveform] };
    const args = [edges, c.lattice, c.points, c.instants] as const;
    const filaments = historyOf(griddedField(edges, c.lattice.cellSize, c.lattice.medium), c.points, c.instants);
    const measured = minus(yeeField(...args), filaments);
    const predicted = predictLatticeErrorBySpectrum(...args);
    for (let point = 0; point < c.points.count; point++)
      for (const first of [0, 3] as const) {
        const size = (values: Float64Array) => normOf(values, c.instants.count, point, first);
        rows.push({
          'rise, steps': rise,
          field: first === 0 ? 'E' : 'H',
          'cells away': c.distances[point]!,
          'measured, %': (100 * size(measured)) / size(filaments),
          spectrum: size(predicted) / size(measured),
        });
      }
  }
  console.table(rows);
  // Above some 5 cells a wavelength the amplitude is known to second order only, and a kink radiates there too.
  for (const { spectrum } of rows) expect(Math.max(spectrum, 1 / spectrum)).toBeLessThan(1.25);
});

test.each([
  { cellsPerWavelength: 8, factor: 1.01 },
  { cellsPerWavelength: 4, factor: 1.13 },
])(
  'two to five cells from a dipole edge, $cellsPerWavelength cells per shortest wavelength: within $factor',
  (given) => {
    const result = measure({
      ...oneEdge,
      cellSize: [1e-3, 1e-3, 1e-3],
      cellsPerWavelength: given.cellsPerWavelength,
      observers: [
        [2, 0, 0],
        [0, 0, 2],
        [1, 1, 1],
        [3, 0, 0],
        [0, 3, 1],
        [2, 2, 2],
        [4, 0, 0],
        [0, 0, 4],
      ],
    });
    print(result);
    expect(summary(result.outcomes, 'time')['worst factor']).toBeLessThan(given.factor);
    expect(summary(result.outcomes, 'spectrum')['worst factor']).toBeLessThan(given.factor);
  },
);

test("after a pulse with a net charge the run keeps the lattice's own static field", () => {
  const spec = oneEdge;
  const c = latticeCase(spec);
  const edges = c.gridded.edges;
  const values = yeeField(edges, c.lattice, c.points, c.instants);
  const { at } = staticGreen(spec.cellSize);
  const charge = edges.weight[0]! * edges.waveforms[0]!.finalCharge;
  const rows = spec.observers.map(([x, y, z], point) => {
    // E_z = (q/(ε d_z)) [g(z + 1) − 2 g(z) + g(z − 1)], the edge being along z
    const expected =
      (charge * (at(x, y, z + 1) - 2 * at(x, y, z) + at(x, y, z - 1))) /
      spec.cellSize[2] /
      c.lattice.medium.permittivity;
    const last = values[(point * 6 + 3) * c.instants.count - 1]!;
    return { cell: [x, y, z].join(), expected, 'last instant': last, 'relative difference': last / expected - 1 };
  });
  console.table(rows);
  // The pulse is 5 sigma past: 4·10⁻⁶ of its peak is left, in w and more so in w′.
  for (const row of rows) expect(Math.abs(row['relative difference'])).toBeLessThan(1e-4);
});
