import { describe, expect, test } from 'vitest';
import { directivityOf, largestCurrent, radiatedPower, radiationResistance } from '../../src/derived/radiation.ts';
import { cos, exp, sin } from '../../src/elementary/elementary.ts';
import { fieldOf } from '../../src/retarded/field.ts';
import { prepareSources } from '../../src/retarded/prepare.ts';
import { fieldBySpectrum, type SteadyValue, steadyField } from '../../src/retarded/spectral.ts';
import { compareSolvers } from '../../src/run/compare.ts';
import { loadScenario } from '../../src/scenario/load.ts';
import type { Scenario, Vec3 } from '../../src/scenario/model.ts';
import { describeProblem } from '../../src/scenario/reading.ts';
import { difference, size } from '../retarded/sources.ts';

/** Wires whose current is given by frequency, against the same wires given otherwise and against handbook values. */

const C = 299_792_458;
const LENGTH = 0.06;
const SIGMA = 0.12e-9;
const DELAY = 9 * SIGMA;
/** e^(−x²/2) is 1e-17 at x = 8.85 */
const HIGHEST = 8.85 / (2 * Math.PI * SIGMA);
const PERIOD = 22 * SIGMA;

/** Lines of a Gaussian of 1 A: I_k = 2W(k/T)/T, W = σ√(2π) e^(−(ωσ)²/2 − jω·delay), half of it at 0 Hz; T = PERIOD. */
const lines = Array.from({ length: Math.floor(HIGHEST * PERIOD) + 1 }, (_, k) => {
  const f = k / PERIOD;
  const amplitude =
    ((k === 0 ? 1 : 2) / PERIOD) * SIGMA * Math.sqrt(2 * Math.PI) * exp(-0.5 * (2 * Math.PI * f * SIGMA) ** 2);
  return { f, amplitude, phase: -2 * Math.PI * ((f * DELAY) % 1) };
});

/** e^(jx) times a length, as two numbers. */
const turned = (amplitude: number, phase: number) => [amplitude * cos(phase), amplitude * sin(phase)];

const scenario = (current: object, more: object = {}) => ({
  sources: [
    {
      type: 'wire',
      name: 'cable',
      points: [
        ['1 mm', '-2 mm', '-30 mm'],
        ['1 mm', '-2 mm', '30 mm'],
      ],
      current,
    },
  ],
  grid: { cellSize: '5 mm', box: { from: ['-60 mm', '-60 mm', '-60 mm'], to: ['60 mm', '60 mm', '60 mm'] } },
  duration: 20 * SIGMA,
  observers: [{ name: 'A', at: ['40 mm', '20 mm', '35 mm'] }],
  ...more,
});

function loaded(json: object, asked: 'time' | 'frequency' = 'time'): Scenario {
  const found = loadScenario(json, asked);
  if ('problems' in found) throw new Error(found.problems.map(describeProblem).join('\n'));
  return found.scenario;
}

const pulse = { type: 'gaussian', amplitude: '1 A', delay: DELAY, sigma: SIGMA };
const uniform = { profile: 'uniform', waveform: pulse };
const uniformByFrequency = {
  profile: 'sampled',
  positions: [0, 0.02, LENGTH],
  phasors: lines.map(({ f, amplitude, phase }) => [
    f,
    ...Array(3)
      .fill(turned(amplitude, f === 0 ? 0 : phase))
      .flat(),
  ]),
};

const POINTS: readonly Vec3[] = [
  [0.004, -0.002, 0.011],
  [0.04, 0.02, 0.035],
  [-0.5, 0.7, 0.4],
];

describe('the same wire, given in time and by frequency', () => {
  test('the exact field by retarded integrals and by spectra: to rounding of the sums', () => {
    const inTime = loaded(scenario(uniform));
    const byFrequency = loaded(scenario(uniformByFrequency));
    const reference = fieldOf(prepareSources(inTime.sources, inTime.medium, 'best'), { tolerance: 1e-13 });
    const integrals = fieldOf(prepareSources(byFrequency.sources, byFrequency.medium, 'best'), { tolerance: 1e-13 });
    const spectral = fieldBySpectrum(byFrequency.sources, byFrequency.medium, 20 * SIGMA);
    const rows = POINTS.map((point) => {
      const instants = Array.from({ length: 10 }, (_, n) => size(point) / C + (4 + 1.4 * n) * SIGMA);
      const exact = instants.map((t) => reference(point, t));
      const peak = { E: Math.max(...exact.map(({ E }) => size(E))), H: Math.max(...exact.map(({ H }) => size(H))) };
      const off = (found: readonly { E: Vec3; H: Vec3 }[]) =>
        Math.max(
          ...found.map(({ E, H }, n) =>
            Math.max(difference(E, exact[n]!.E) / peak.E, difference(H, exact[n]!.H) / peak.H),
          ),
        );
      return {
        point: point.join(),
        retarded: off(instants.map((t) => integrals(point, t))),
        spectral: off(spectral(point, instants).values),
      };
    });
    console.table(rows);
    // 32 lines: 1e-14 of w and 2e-14 of w′ (test/scenario/phasors.test.ts), and what the integrals' tolerance leaves.
    // By spectra 1e-8 is asked of pulses with a delay of 8 sigma or more; this one is smooth to rounding.
    for (const { retarded, spectral } of rows) {
      expect(retarded).toBeLessThan(5e-13);
      expect(spectral).toBeLessThan(1e-9);
    }
  });

  test('both solvers: every figure the same but for single rounding', async () => {
    const [inTime, byFrequency] = [
      (await compareSolvers(scenario(uniform), { threads: 1 })).result,
      (await compareSolvers(scenario(uniformByFrequency), { threads: 1 })).result,
    ];
    const figures = (result: typeof inTime) => ({
      box: result.norms.E.relativeL2!,
      total: result.budget.total.relativeL2!,
      lattice: result.budget.lattice!.relativeL2!,
      gridding: result.budget.gridding!.relativeL2!,
      observer: result.observers[0]!.E!.relativeL2!,
    });
    const [a, b] = [figures(inTime), figures(byFrequency)];
    console.table([a, b]);
    // Relative errors of a per cent or less, from single precision samples that are right to 6e-8 of the peak.
    for (const key of Object.keys(a) as (keyof typeof a)[]) expect(Math.abs(a[key] - b[key]), key).toBeLessThan(1e-6);
    expect(byFrequency.notes.join('\n')).toContain(
      'The current of “cable” is the sum of 30 lines 378.8 MHz apart, 378.8 MHz to 11.36 GHz, over one period, 2.64 ns.',
    );
  });
});

/** Largest |difference| of two complex fields over |first|, E and H. */
function apart(a: SteadyValue, b: SteadyValue): number {
  const norm = (list: readonly (readonly [number, number])[]) =>
    Math.sqrt(list.reduce((sum, [re, im]) => sum + re * re + im * im, 0));
  return Math.max(
    ...(['E', 'H'] as const).map(
      (field) => norm(a[field].map(([re, im], c) => [re - b[field][c]![0], im - b[field][c]![1]])) / norm(a[field]),
    ),
  );
}

describe('by frequency', () => {
  test('a wave e^(−jks) sampled at stations tends to the travelling wave with the square of their spacing', () => {
    const frequency = 2e9;
    const k = (2 * Math.PI * frequency) / (0.8 * C);
    const wave = loaded(scenario({ profile: 'travelling', speed: 0.8, waveform: pulse }));
    const errors = [8, 16, 32, 64].map((parts) => {
      const positions = Array.from({ length: parts + 1 }, (_, m) => (m * LENGTH) / parts);
      const phasors = [[frequency, ...positions.flatMap((s) => turned(1, -k * s))]];
      const sampled = loaded(scenario({ profile: 'sampled', positions, phasors }), 'frequency');
      const [exact, found] = [wave, sampled].map(({ sources, medium }) => steadyField(sources, medium));
      return Math.max(...POINTS.slice(1).map((point) => apart(exact!(point, frequency), found!(point, frequency))));
    });
    const orders = errors.slice(1).map((e, m) => Math.log2(errors[m]! / e));
    console.table(
      errors.map((error, m) => ({ stations: 8 * 2 ** m + 1, error, order: m === 0 ? '' : orders[m - 1]! })),
    );
    // Straight lines between stations miss (kh)²/8 of the wave at most; a sign of the phase gone wrong is of order one.
    for (const [m, error] of errors.entries()) expect(error).toBeLessThan(2 * ((k * LENGTH) / (8 * 2 ** m)) ** 2);
    for (const order of orders) expect(Math.abs(order - 2)).toBeLessThan(0.1);
  });

  test('a half-wave dipole: R = η Cin(2π)/(4π) = 73.08 Ω and D = 1.641 (Balanis, Antenna Theory, 4th ed., from memory)', () => {
    const frequency = C / (2 * LENGTH);
    const figures = [16, 32, 64].map((parts) => {
      const positions = Array.from({ length: parts + 1 }, (_, m) => (m * LENGTH) / parts);
      // of any phase: a power has none
      const phasors = [[frequency, ...positions.flatMap((s) => turned(0.3 * sin((Math.PI * s) / LENGTH), 1.1))]];
      const { sources, medium } = loaded(scenario({ profile: 'sampled', positions, phasors }), 'frequency');
      const current = largestCurrent(sources, medium, frequency);
      expect(Math.abs(current - 0.3)).toBeLessThan(1e-12);
      const resistance = radiationResistance(radiatedPower(sources, medium)(frequency).value, current);
      return { parts, resistance, directivity: directivityOf(sources, medium)(frequency).value };
    });
    console.table(figures);
    // Straight lines between stations have (kh)²/12 less moment, kh = π/parts: twice that in R, 0.03 Ω for 64 parts.
    for (const { parts, resistance, directivity } of figures) {
      const less = (Math.PI / parts) ** 2 / 6;
      expect(Math.abs(resistance / 73.08 - 1 + less)).toBeLessThan(0.2 * less + 1e-4);
      expect(Math.abs(directivity - 1.641)).toBeLessThan(0.5 * less + 5e-4);
    }
  });
});
