import { describe, expect, test } from 'vitest';
import type { FaceLattice, LinearWall } from '../../src/fdtd/boundaries/boundary.ts';
import { cpml as cpmlMethod } from '../../src/fdtd/boundaries/cpml.ts';
import { mur1 } from '../../src/fdtd/boundaries/mur1.ts';
import { stretchAt } from '../../src/fdtd/layout.ts';
import type { GridProblem } from '../../src/fdtd/problem.ts';
import { marchAlone } from '../../src/fdtd/run.ts';
import { mediumOf } from '../../src/scenario/constants.ts';
import type { Boundary } from '../../src/scenario/model.ts';
import { makeWaveform } from '../../src/scenario/waveforms.ts';
import { courantStep, cpml, edgesOf, everyFace, MUR, PEC, plainProblem } from './problems.ts';

type Cpml = Extract<Boundary, { type: 'cpml' }>;
const medium = mediumOf(2.2, 1.3);
const at: FaceLattice = { cell: 2e-3, across: [2e-3, 2e-3], timeStep: 3e-12, medium };

describe('Mur', () => {
  /** s = vΔt/h as wished. */
  const crossing = (s: number): FaceLattice => ({ ...at, timeStep: (s * at.cell) / medium.speed });

  test('first order: the factor is (s − 1)/(s + 1), and 0 where a wave crosses one cell a step', () => {
    expect(mur1.wall({ type: 'mur1' }, crossing(1))).toMatchObject({ older: [], old: [-0, 1], now: [0] });
    // s = 1/3: (1/3 − 1)/(1/3 + 1) = −1/2; three roundings.
    const wall = mur1.wall({ type: 'mur1' }, crossing(1 / 3)) as LinearWall;
    expect(Math.abs(wall.now[0]! + 0.5)).toBeLessThanOrEqual(4 * Number.EPSILON);
  });
});

describe('CPML', () => {
  const boundary = cpml(8, { kappaMax: 5, alphaFrequency: 1e9, sigmaFactor: 1.2 }) as Cpml;

  test('σ at the wall is 0.8(m + 1)/(ηh) in the medium’s own η', () => {
    // With α = 0 and κ = 1, b = exp(−σΔt/ε), so σ can be read off b.
    const plain = cpml(8, { alphaFrequency: 0, grading: 3 }) as Cpml;
    const { b, a, inverseKappa } = cpmlMethod.stretch(plain, 1, at);
    const sigma = (-Math.log(b) * medium.permittivity) / at.timeStep;
    expect(sigma / (3.2 / (medium.impedance * at.cell))).toBeCloseTo(1, 12);
    expect(a).toBeCloseTo(b - 1, 15);
    expect(inverseKappa).toBe(1);
  });

  test('a constant difference is divided by κ + σ/α, the stretch at zero frequency', () => {
    for (const depth of [0.1, 0.35, 0.6, 0.95]) {
      const { b, a, inverseKappa } = cpmlMethod.stretch(boundary, depth, at);
      const sigma = ((1.2 * 3.2) / (medium.impedance * at.cell)) * depth ** 3;
      const kappa = 1 + 4 * depth ** 3;
      const alpha = 2 * Math.PI * medium.permittivity * 1e9 * (1 - depth);
      // ψ → aΔ/(1 − b). 1 − b loses |log10(1 − b)| digits, two at most here.
      expect((inverseKappa + a / (1 - b)) * (kappa + sigma / alpha)).toBeCloseTo(1, 12);
    }
  });

  test('E sees whole depths, H half depths, and both ends mirror each other', () => {
    const problem = plainProblem([4, 4, 4], { boundary: everyFace(boundary), pad: everyFace(9) });
    const cells = 22;
    const [cell, ...across] = problem.cellSize;
    const lattice: FaceLattice = { cell, across, timeStep: problem.timeStep, medium: problem.medium };
    for (let layer = 1; layer < 8; layer++)
      expect(stretchAt(problem, 0, 'E', layer)).toEqual(cpmlMethod.stretch(boundary, (8 - layer) / 8, lattice));
    for (let layer = 0; layer < 8; layer++) {
      expect(stretchAt(problem, 1, 'H', layer)).toEqual(cpmlMethod.stretch(boundary, (7.5 - layer) / 8, lattice));
      expect(stretchAt(problem, 2, 'H', cells - 1 - layer)).toEqual(stretchAt(problem, 2, 'H', layer));
      if (layer > 0) expect(stretchAt(problem, 2, 'E', cells - layer)).toEqual(stretchAt(problem, 2, 'E', layer));
    }
    for (const inner of [8, 9, 13]) expect(stretchAt(problem, 0, 'E', inner)).toEqual({ b: 0, a: 0, inverseKappa: 1 });
  });
});

/** Largest deviation of the samples from those of a lattice too large for anything to return, relative to their peak. */
function reflection(boundary: Boundary, layers: number): number {
  const cells = 16;
  const steps = 110;
  const cellSize: [number, number, number] = [4e-3, 4e-3, 4e-3];
  const waveform = makeWaveform({ type: 'gaussianDerivative', amplitude: 1, delay: 0.25e-9, sigma: 0.05e-9 });
  const common: Partial<GridProblem> = {
    cellSize,
    timeStep: courantStep(0.99, cellSize, mediumOf(1, 1).speed),
    steps,
    currents: edgesOf([{ axis: 2, node: [6, 7, 8] }], waveform),
    samples: [{ cell: Int32Array.from([1, 8, 8, 2, 2, 13, 8, 14, 7]), every: 1 }],
  };
  const small = plainProblem([cells, cells, cells], {
    ...common,
    boundary: everyFace(boundary),
    pad: everyFace(layers),
  });
  // A reflection must travel to the wall and back, at most one cell a step.
  const large = plainProblem([cells, cells, cells], {
    ...common,
    pad: everyFace(steps / 2),
    activeRegion: { margin: 12 },
  });
  const near = marchAlone(small).samples[0]!;
  const free = marchAlone(large).samples[0]!;
  let worst = 0;
  let peak = 0;
  free.forEach((value, n) => {
    if (Math.floor(n / steps) % 6 > 2) return;
    peak = Math.max(peak, Math.abs(value));
    worst = Math.max(worst, Math.abs(near[n]! - value));
  });
  return 20 * Math.log10(worst / peak);
}

test('absorbing boundaries absorb, more layers more, and a conductor does not', () => {
  const table = {
    pec: reflection(PEC, 0),
    mur1: reflection(MUR, 0),
    'cpml 4': reflection(cpml(4), 4),
    'cpml 8': reflection(cpml(8), 8),
    'cpml 12': reflection(cpml(12), 12),
  };
  console.table(table);
  // Samples two cells from a corner, where Mur's condition is at its worst: (cos θ − 1)/(cos θ + 1) for θ = 55° is
  // −11 dB, and the near field adds to it. CPML of 8 to 10 layers: −80 dB and less (Taflove & Hagness, Computational
  // Electrodynamics, 3rd ed., ch. 7, from memory).
  expect(table.pec).toBeGreaterThan(-6);
  expect(table.mur1).toBeLessThan(table.pec - 6);
  expect(table.mur1).toBeGreaterThan(-15);
  expect(table['cpml 4']).toBeLessThan(-40);
  expect(table['cpml 8']).toBeLessThan(table['cpml 4'] - 12);
  expect(table['cpml 12']).toBeLessThan(table['cpml 8']);
});
