import { expect, test } from 'vitest';
import { decibels } from '../../src/elementary/elementary.ts';
import { marchAlone } from '../../src/fdtd/run.ts';
import { angleReflections, guideFor, normalWavenumber } from '../../src/run/guide.ts';
import type { Boundary } from '../../src/scenario/model.ts';
import { asked } from './solveHere.ts';

const SIGMA = 0.189598e-9; // −40 dB of what radiates at 3 GHz, shortest wavelength 0.1 m

const question = asked({
  sources: [
    {
      type: 'dipole',
      at: [0, 0, 0],
      direction: [0, 0, 1],
      length: 0.01,
      current: { waveform: { type: 'gaussianDerivative', amplitude: 1, delay: 6 * SIGMA, sigma: SIGMA } },
    },
  ],
  grid: { cellSize: 0.01, box: { from: [-0.1, -0.1, -0.1], to: [0.1, 0.1, 0.1] } },
  duration: 12 * SIGMA,
});

const measured = (wall: Boundary) => {
  const guide = guideFor(question, wall, 0);
  const [a, b] = [guide.withWall, guide.endless].map((problem) => marchAlone(problem).samples[0]!);
  return { guide, ...angleReflections(guide, a!, b!) };
};

test('a perfect conductor returns everything, at any angle', () => {
  const { angles, reflected } = measured({ type: 'pec' });
  expect(angles.length).toBeGreaterThan(8);
  // Towards grazing the window ends before the slowest of the pulse is through.
  reflected.forEach((r, m) => {
    expect(Math.abs(r - 1)).toBeLessThan(angles[m]! < Math.PI / 4 ? 2e-4 : 1e-2);
  });
});

test('Mur’s first order returns what its own difference scheme says, and nearly (1 − cos θ)/(1 + cos θ)', () => {
  const { guide, angles, reflected } = measured({ type: 'mur1' });
  const { cellSize, timeStep, medium } = guide.withWall;
  const [dx, dy] = cellSize;
  const s = (medium.speed * timeStep) / dx;
  const g = (s - 1) / (s + 1);
  angles.forEach((angle, m) => {
    // G. Mur 1981 with E = e^(jωt)(e^(−jkx) + R e^(jkx)), the wall at x = 0:
    // R = −(z − p − g(pz − 1))/(z − 1/p − g(z/p − 1)), z = e^(jωΔt), p = e^(jk dx).
    const k = normalWavenumber(guide.frequency, ((m + 1) * Math.PI) / (guide.across * dy), {
      dx,
      dy,
      timeStep,
      medium,
    });
    const [zt, pt] = [2 * Math.PI * guide.frequency * timeStep, k * dx];
    const size = (p: number) => {
      const re = Math.cos(zt) - Math.cos(p) - g * (Math.cos(zt + p) - 1);
      const im = Math.sin(zt) - Math.sin(p) - g * Math.sin(zt + p);
      return Math.sqrt(re * re + im * im);
    };
    const expected = size(pt) / size(-pt);
    const theory = (1 - Math.cos(angle)) / (1 + Math.cos(angle));
    console.log(
      `${((angle * 180) / Math.PI).toFixed(1)}°: measured ${decibels(reflected[m]!).toFixed(2)} dB, its scheme ${decibels(expected).toFixed(2)} dB, Engquist & Majda ${decibels(theory).toFixed(2)} dB`,
    );
    expect(Math.abs(reflected[m]! / expected - 1)).toBeLessThan(0.02);
    if (angle > 0.5) expect(Math.abs(decibels(reflected[m]! / theory))).toBeLessThan(1);
  });
});

test('an absorber of ten layers: below −80 dB, far above what the measurement itself leaves', () => {
  const alphaFrequency = 0.05 / (question.scenario.medium.impedance * 0.01 * 2 * Math.PI * 8.8541878e-12);
  const wall = { type: 'cpml', layers: 10, grading: 3, kappaMax: 1, sigmaFactor: 1, alphaFrequency } as const;
  const { angles, reflected, floor } = measured(wall);
  angles.forEach((angle, m) => {
    console.log(`${((angle * 180) / Math.PI).toFixed(1)}°: ${decibels(reflected[m]!).toFixed(1)} dB`);
  });
  console.log(`floor ${decibels(floor).toFixed(0)} dB`);
  expect(angles.length).toBeGreaterThan(6);
  for (const r of reflected) {
    expect(decibels(r)).toBeLessThan(-80);
    expect(r).toBeGreaterThan(10 * floor);
  }
});
