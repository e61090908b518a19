import { describe, expect, test } from 'vitest';
import type { FaceLattice, LinearWall } from '../../src/fdtd/boundaries/boundary.ts';
import { cpml as cpmlMethod } from '../../src/fdtd/boundaries/cpml.ts';
import { higdon2 } from '../../src/fdtd/boundaries/higdon2.ts';
import { liao } from '../../src/fdtd/boundaries/liao.ts';
import { mur1 } from '../../src/fdtd/boundaries/mur1.ts';
import { mur2 } from '../../src/fdtd/boundaries/mur2.ts';
import { splitPml } from '../../src/fdtd/boundaries/splitPml.ts';
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

  test('second order: the coefficients of the paper at cΔt = h/2', () => {
    // Mur 1981, eq. 16 with cΔt = δ/2: (cΔt − δ)/(cΔt + δ) = −1/3, 2δ/(cΔt + δ) = 4/3, (cΔt)²/(2δ(cΔt + δ)) = 1/12, the last
    // for each of four neighbours and −4 for the point itself (from memory).
    const wall = mur2.wall({ type: 'mur2' }, crossing(1 / 2)) as LinearWall;
    near(wall.older, [-1 / 3, -1]);
    near(wall.now, [-1 / 3]);
    near(wall.sideways!.across, [1 / 12, 1 / 12]);
    near(wall.old, [4 / 3 - 4 / 12, 4 / 3 - 4 / 12]);
    near((wall.sideways!.rim as LinearWall).now, [-1 / 3]);
  });

  test('a field that does not change stays: the coefficients sum to 1', () => {
    const wall = mur2.wall({ type: 'mur2' }, { ...at, across: [3e-3, 5e-3] }) as LinearWall;
    const sides = 4 * (wall.sideways!.across[0] + wall.sideways!.across[1]);
    expect(Math.abs(total(wall) + sides - 1)).toBeLessThan(16 * Number.EPSILON);
  });
});

/** Lists that agree to rounding. */
function near(actual: readonly number[], expected: readonly number[]): void {
  expect(actual.length).toBe(expected.length);
  actual.forEach((x, n) => {
    expect(Math.abs(x - expected[n]!)).toBeLessThan(8 * Number.EPSILON);
  });
}

/** Σ of the coefficients of a wall, neighbours along it left out. */
const total = ({ older, old, now }: LinearWall) => [...older, ...old, ...now].reduce((sum, x) => sum + x, 0);

describe('Higdon', () => {
  const wallOf = (angles: [number, number], damping: number, s: number) =>
    higdon2.wall({ type: 'higdon2', angles, damping }, { ...at, timeStep: (s * at.cell) / medium.speed }) as LinearWall;

  test('each factor is the box scheme of the paper: at 0° twice Mur’s first order', () => {
    // Higdon 1986, sect. 5: with a = b = ½ the first-order operator is I + β Z^{-1} + γ K + δ Z^{-1}K; at cos α = 1 its
    // coefficients are those of Mur. Its square: (1 + fK⁻ …)², f = (s − 1)/(s + 1).
    const s = 0.4;
    const f = (s - 1) / (s + 1);
    // (1 − f K + f Z − ZK)², Z one step back and K one cell in: the coefficients of E0 moved to the other side.
    const wall = wallOf([0, 0], 0, s);
    near(wall.now, [2 * f, -f * f]);
    near(wall.old, [-2 * f, 2 + 2 * f * f, -2 * f]);
    near(wall.older, [-f * f, 2 * f, -1]);
  });

  test('without damping a constant field stays, with damping it decays', () => {
    expect(Math.abs(total(wallOf([0, Math.PI / 4], 0, 0.57)) - 1)).toBeLessThan(32 * Number.EPSILON);
    expect(total(wallOf([0, Math.PI / 4], 0.01, 0.57))).toBeLessThan(1);
  });
});

describe('Liao', () => {
  const wallOf = (damping: number, s: number) =>
    liao.wall({ type: 'liao', damping }, { ...at, timeStep: (s * at.cell) / medium.speed }) as LinearWall;

  test('where a wave crosses one cell a step it is the multi-transmitting formula u0 = 2u1 − u2', () => {
    // Liao and others 1984: u_0^{p+1} = Σ_j (−1)^{j+1} C(N, j) u_j^{p+1−j}, N = 2.
    const wall = wallOf(0, 1);
    near(wall.old, [0, 2, 0]);
    near(wall.older, [-0, -0, -1, -0, -0]);
  });

  test('in between it interpolates quadratically: 3/8, 6/8, −1/8 at half a cell', () => {
    // t1 = (2 − s)(1 − s)/2, t2 = s(2 − s), t3 = s(s − 1)/2 (Liao and others 1984), and their convolution for two steps.
    const wall = wallOf(0, 1 / 2);
    near(wall.old, [6 / 8, 12 / 8, -2 / 8]);
    near(
      wall.older,
      [9, 36, 30, -12, 1].map((x) => -x / 64),
    );
    expect(Math.abs(total(wall) - 1)).toBeLessThan(16 * Number.EPSILON);
  });
});

describe('Split-field PML', () => {
  test('D, and the gain of exponential time stepping', () => {
    // Berenger 1994: E ← e^(−σΔt/ε) E + (1 − e^(−σΔt/ε))/(σΔx) ΔH; here the gain is relative to Δt/(εΔx), and what the field
    // takes of Δ in the same step is inverseKappa + a (src/fdtd/boundaries/splitPml.ts).
    const boundary = { type: 'splitPml', layers: 8, grading: 2, sigmaFactor: 0.7 } as const;
    for (const depth of [0.05, 0.4, 0.9]) {
      const sigma = ((0.7 * 0.8 * 3) / (medium.impedance * at.cell)) * depth * depth;
      const lost = (sigma * at.timeStep) / medium.permittivity;
      const { b, a, inverseKappa } = splitPml.stretch(boundary, depth, at);
      expect(b / Math.exp(-lost)).toBeCloseTo(1, 13);
      expect((inverseKappa + a) / ((1 - Math.exp(-lost)) / lost)).toBeCloseTo(1, 11);
    }
  });

  test('the default σmax is that of R(0) = e^(−1.6 layers)', () => {
    // Berenger 1994: R(0) = exp(−(2/(m + 1)) σmax δ/(εv)), δ the thickness.
    const boundary = { type: 'splitPml', layers: 10, grading: 3, sigmaFactor: 1 } as const;
    const { b } = splitPml.stretch(boundary, 1, at);
    const sigma = (-Math.log(b) * medium.permittivity) / at.timeStep;
    const exponent = ((2 / 4) * sigma * 10 * at.cell) / (medium.permittivity * medium.speed);
    expect(exponent).toBeCloseTo(16, 10);
  });
});

test('a magnetic conductor is the plane of symmetry of a box twice as wide', () => {
  const steps = 90;
  const edges = [
    { axis: 2, node: [2, 3, 2], weight: 1 },
    // Upright on the mirror, in the cell beside it, and along it.
    { axis: 0, node: [0, 4, 3], weight: -0.7 },
    { axis: 1, node: [0, 2, 4], weight: 0.4 },
  ];
  const pulse = makeWaveform({ type: 'gaussian', amplitude: 1, delay: 0.12e-9, sigma: 0.02e-9 });
  const cells = [0, 2, 3, 3, 4, 2, 5, 1, 5];
  const common = { steps, scale: 100 };
  const half = plainProblem([6, 7, 8], {
    ...common,
    boundary: { ...everyFace(PEC), 'x-': { type: 'pmc' } },
    pad: { ...everyFace(0), 'x-': 1 },
    currents: edgesOf(edges, pulse),
    samples: [{ cell: Int32Array.from(cells), every: 1 }],
  });
  // The image of a current along the plane has its sign, that of an upright one the other.
  const images = edges.flatMap(({ axis, node: [i, j, k], weight }) =>
    axis !== 0 && i === 0
      ? []
      : [{ axis, node: [axis === 0 ? 5 - i! : 6 - i!, j!, k!], weight: axis === 0 ? -weight : weight }],
  );
  const shifted = edges.map(({ axis, node: [i, j, k], weight }) => ({ axis, node: [i! + 6, j!, k!], weight }));
  const whole = plainProblem([12, 7, 8], {
    ...common,
    currents: edgesOf([...shifted, ...images], pulse),
    samples: [{ cell: Int32Array.from(cells.map((x, n) => (n % 3 === 0 ? x + 6 : x))), every: 1 }],
  });
  const [a, b] = [half, whole].map((problem) => marchAlone(problem).samples[0]!) as [Float64Array, Float64Array];
  const largest = Math.max(...b.map(Math.abs));
  expect(largest).toBeGreaterThan(1);
  expect(Math.max(...a.map((x, n) => Math.abs(x - b[n]!)))).toBeLessThan(10 * steps * Number.EPSILON * largest);
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
