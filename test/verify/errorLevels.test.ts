import { expect, test } from 'vitest';
import { threadsAvailable } from '#platform';
import type { Result } from '../../src/compare/result.ts';
import { prepareCase, solvePrepared, withTeam } from '../../src/run/compare.ts';
import { Recent } from '../../src/run/share.ts';

/**
 * Error levels of a centre-fed wire, part by part, against figures measured beforehand with independent prototypes in C
 * and double precision (a full large box for free space, a 128-bit quadrature for the integrals): box ±0.15 m, Courant
 * number 0.99, Gaussian derivative of sigma 0.189598 ns. Relative L2 of the E vector in time, per cent.
 */
const SIGMA = 0.189598e-9;
const OBSERVERS = [
  { name: '5 cm', at: [0.05, 0, 0.02] },
  { name: '1 cm from face', at: [0.14, 0.02, 0.03] },
  { name: 'near corner', at: [0.13, 0.13, 0.12] },
];

interface Row {
  readonly wire: 'z' | 'tilted';
  readonly observer: string;
  readonly cells: 10 | 20;
  /** lattice, gridding, boundary with CPML of 8 layers, boundary with Mur 1, total with CPML */
  readonly expected: readonly [number, number, number, number, number];
}

const TABLE: readonly Row[] = [
  { wire: 'z', observer: '5 cm', cells: 10, expected: [2.29, 0.7, 0.002, 4.8, 1.66] },
  { wire: 'z', observer: '5 cm', cells: 20, expected: [0.55, 0.19, 0.003, 4.4, 0.37] },
  { wire: 'z', observer: '1 cm from face', cells: 10, expected: [1.22, 0.16, 0.005, 15.8, 1.24] },
  { wire: 'z', observer: '1 cm from face', cells: 20, expected: [0.3, 0.042, 0.031, 14.5, 0.3] },
  { wire: 'z', observer: 'near corner', cells: 10, expected: [1.66, 0.23, 0.009, 23.4, 1.47] },
  { wire: 'tilted', observer: '5 cm', cells: 10, expected: [2.51, 0.72, 0.002, 3.1, 2.08] },
  { wire: 'tilted', observer: '5 cm', cells: 20, expected: [0.63, 0.16, 0.002, 2.7, 0.57] },
];

/** Two arms from the feed outwards, each with a wave out and one back that left the open end reversed. */
function centreFed(wire: Row['wire'], cells: number, boundary: object) {
  const centre = wire === 'z' ? [0, 0, 0] : [1.2e-3, -2.1e-3, 0.7e-3];
  const axis = wire === 'z' ? [0, 0, 1] : [0.48, 0.36, 0.8];
  const arm = 0.05;
  const waveform = { type: 'gaussianDerivative', amplitude: 1, delay: 5 * SIGMA, sigma: SIGMA };
  const source = (sign: number) => ({
    type: 'wire',
    points: [centre, centre.map((x, a) => x + sign * arm * axis[a]!)],
    current: {
      waves: [
        { direction: 'forward', factor: sign },
        { direction: 'backward', factor: -sign, delay: arm / 299792458 },
      ],
      waveform,
    },
  });
  return {
    sources: [source(1), source(-1)],
    grid: { cellSize: 0.1 / cells, box: { from: [-0.15, -0.15, -0.15], to: [0.15, 0.15, 0.15] }, boundary },
    duration: 10 * SIGMA + 1.07e-9,
    observers: OBSERVERS,
  };
}

test('every part of the error is what independent prototypes measured, within 20 %', async () => {
  const budgets = new Map<string, Result>();
  // Free space and the integrals do not know the walls: done once for both.
  const shared = new Recent(3);
  await withTeam(threadsAvailable(), undefined, async (team) => {
    for (const wire of ['z', 'tilted'] as const)
      for (const cells of [10, 20] as const)
        for (const boundary of [{ type: 'cpml', layers: 8 }, { type: 'mur1' }]) {
          const { result } = await solvePrepared(prepareCase(centreFed(wire, cells, boundary)), {
            team,
            gridThreads: team.threads,
            onProgress: () => {},
            share: (work, make) => shared.take(`${wire} ${cells} ${work}`, make),
          });
          budgets.set(`${wire} ${cells} ${boundary.type}`, result);
        }
  });
  const misses: string[] = [];
  console.log('wire, observer, cells per wavelength: measured (expected), per cent');
  for (const { wire, observer, cells, expected } of TABLE) {
    const budget = (boundary: string) =>
      budgets.get(`${wire} ${cells} ${boundary}`)!.observers.find(({ name }) => name === observer)!.budget!;
    const [cpml, mur] = [budget('cpml'), budget('mur1')];
    const measured = [cpml.lattice, cpml.gridding, cpml.boundary, mur.boundary, cpml.total].map(
      (entry) => 100 * entry!.relativeL2!,
    );
    const cell = (m: number) => `${measured[m]!.toPrecision(3)} (${expected[m]})`;
    console.log(
      `${wire}, ${observer}, ${cells}: lattice ${cell(0)}, gridding ${cell(1)}, CPML ${cell(2)}, Mur 1 ${cell(3)}, total ${cell(4)}`,
    );
    ['lattice', 'gridding', 'CPML 8', 'Mur 1', 'total'].forEach((name, m) => {
      if (expected[m]! >= 0.1 && Math.abs(measured[m]! / expected[m]! - 1) > 0.2)
        misses.push(`${wire}, ${observer}, ${cells}, ${name}: ${cell(m)}`);
    });
  }
  expect(misses).toEqual([]);
});
