import { uniformInt } from 'pure-rand/distribution/uniformInt';
import { xoroshiro128plus } from 'pure-rand/generator/xoroshiro128plus';
import { describe, expect, test } from 'vitest';
import { centredRule, chooseRule, inCellRule, measureRule } from '../../src/retarded/delayGrid.ts';
import { fieldOf } from '../../src/retarded/field.ts';
import { exactHistory } from '../../src/retarded/history.ts';
import { type Method, prepareSources } from '../../src/retarded/prepare.ts';
import type { Source, Vec3 } from '../../src/scenario/model.ts';
import { decaying, hat, standing } from '../../src/scenario/profiles.ts';
import { instantsOf, samplePoints } from '../../src/trace/trace.ts';
import {
  centreFed,
  dipole,
  jumping,
  kinked,
  loop,
  smooth,
  travelling,
  uniform,
  unipolar,
  vacuum,
  wire,
} from './sources.ts';

const h = 5e-3;
const timeStep = (0.99 * h) / (vacuum.speed * Math.sqrt(3));

/** Cells within 30 of the origin, seeded. */
function cells(count: number, seed: number): Int32Array {
  const rng = xoroshiro128plus(seed);
  return Int32Array.from({ length: 3 * count }, () => uniformInt(rng, -30, 30));
}

describe('a history is the field at every instant', () => {
  const wave = { smooth, unipolar, jumping, kinked };
  const cases: [string, Method, (w: typeof smooth) => Source[]][] = [
    ['centre-fed wire', 'best', (w) => centreFed([1e-3, 2e-3, 0], [0.48, 0.36, 0.8], 0.05, w)],
    [
      'uniform wire',
      'best',
      (w) => [
        wire(
          [
            [0, 0, -0.05],
            [0.01, 0, 0.05],
          ],
          uniform,
          w,
        ),
      ],
    ],
    [
      'slow wave on a bent wire',
      'best',
      (w) => [
        wire(
          [
            [0, 0, -0.03],
            [0.01, 0, 0.03],
            [0.02, 0.03, 0.03],
          ],
          travelling(0.6),
          w,
        ),
      ],
    ],
    ['loop', 'best', (w) => [loop([1e-3, 0, 0], [0, 0.6, 0.8], 0.03, w)]],
    ['wave on a loop', 'best', (w) => [{ ...loop([1e-3, 0, 0], [0, 0.6, 0.8], 0.03, w), terms: travelling(0.7) }]],
    [
      'wave launched before t = 0',
      'best',
      (w) => [
        wire(
          [
            [0, 0, -0.05],
            [0.01, 0, 0.05],
          ],
          [{ factor: 1, delay: -0.4e-9, slowness: 0 }],
          w,
        ),
      ],
    ],
    [
      'standing and decaying currents on a bent wire',
      'best',
      (w) => {
        const bent = wire(
          [
            [0, 0, -0.03],
            [0.01, 0, 0.03],
            [0.02, 0.03, 0.03],
          ],
          [],
          w,
        );
        const { length } = bent.curve;
        return [
          {
            ...bent,
            terms: [
              { factor: 1, delay: 0, slowness: 0, profile: standing(length, 40) },
              { factor: -0.7, delay: 0.1e-9, slowness: 1 / vacuum.speed, profile: decaying(length, 0.04, 'forward') },
              { factor: 0.5, delay: 0, slowness: 0, profile: hat([0, 0.02, 0.05, length], 2) },
            ],
          },
        ];
      },
    ],
    ['dipole', 'best', (w) => [dipole([1e-3, 2e-3, 3e-3], [0.6, 0, 0.8], 2e-3, w)]],
    [
      'two pulses',
      'best',
      (w) => [
        wire(
          [
            [0, 0, -0.05],
            [0.01, 0, 0.05],
          ],
          uniform,
          w,
        ),
        dipole([0.02, 0, 0], [0, 0, 1], 1e-3, smooth),
      ],
    ],
  ];
  test.each(cases)('%s, %s', (name, method, build) => {
    const rows: Record<string, unknown> = {};
    for (const [pulse, waveform] of Object.entries(wave)) {
      const sources = build(waveform);
      const points = samplePoints(cells(4, 7), [0.7e-3, 1.1e-3, 0.3e-3], [h, h, h]);
      const instants = instantsOf(280, timeStep);
      const history = exactHistory(sources, vacuum, points, instants, { method });
      const field = fieldOf(prepareSources(sources, vacuum, 'best'), { potentials: false, tolerance: 1e-12 });
      let worst = 0;
      let scale = 0;
      let bound = 0;
      for (let m = 0; m < points.count * 6; m++) {
        const component = m % 6;
        const at: Vec3 = [points.position[3 * m]!, points.position[3 * m + 1]!, points.position[3 * m + 2]!];
        for (let n = m % 5; n < instants.count; n += 13) {
          const f = field(at, component < 3 ? instants.E[n]! : instants.H[n]!);
          const unit = component < 3 ? 1 : vacuum.impedance;
          const exact = component < 3 ? f.E[component]! : f.H[component - 3]!;
          const own = component < 3 ? f.errorE : f.errorH;
          const error = Math.abs(history.values[m * instants.count + n]! - exact);
          expect(error, `${name}, ${pulse}, site ${m}, instant ${n}`).toBeLessThanOrEqual(history.errorBound[m]! + own);
          worst = Math.max(worst, unit * error);
          bound = Math.max(bound, unit * history.errorBound[m]!);
          scale = Math.max(scale, unit * Math.abs(exact));
        }
      }
      rows[pulse] = { error: (worst / scale).toExponential(1), bound: (bound / scale).toExponential(1) };
      expect(worst / scale).toBeLessThan(1e-9);
      expect(bound / scale).toBeLessThan(1e-8);
    }
    console.table(rows);
  });

  test('values of one site do not depend on which other sites are asked for', () => {
    const sources = [
      wire(
        [
          [0, 0, -0.05],
          [0.01, 0, 0.05],
        ],
        uniform,
        kinked,
      ),
    ];
    const instants = instantsOf(100, timeStep);
    const all = exactHistory(sources, vacuum, samplePoints(cells(6, 3), [0.7e-3, 1e-3, 0], [h, h, h]), instants);
    const last = samplePoints(cells(6, 3).slice(15), [0.7e-3, 1e-3, 0], [h, h, h]);
    const one = exactHistory(sources, vacuum, last, instants);
    expect(one.values).toEqual(all.values.slice(5 * 6 * 100));
  });

  test('one instant, thinned instants and a step longer than the pulse are served too', () => {
    const sources = centreFed([0, 0, 0], [0, 0, 1], 0.05, smooth);
    const points = samplePoints(Int32Array.of(12, 3, 4), [0.7e-3, 1e-3, 0], [h, h, h]);
    const field = fieldOf(prepareSources(sources, vacuum, 'best'), { potentials: false });
    for (const [steps, every] of [
      [240, 240],
      [240, 7],
      [240, 60],
    ] as const) {
      const instants = instantsOf(steps, timeStep, every);
      const { values, errorBound } = exactHistory(sources, vacuum, points, instants);
      for (let m = 0; m < 6; m++) {
        const at: Vec3 = [points.position[3 * m]!, points.position[3 * m + 1]!, points.position[3 * m + 2]!];
        for (let n = 0; n < instants.count; n++) {
          const f = field(at, m < 3 ? instants.E[n]! : instants.H[n]!);
          const error = Math.abs(values[m * instants.count + n]! - (m < 3 ? f.E[m]! : f.H[m - 3]!));
          expect(error).toBeLessThanOrEqual(errorBound[m]! + (m < 3 ? f.errorE : f.errorH));
        }
      }
    }
  });

  test('instants that are not equidistant, and sites on a source, are refused', () => {
    const sources = [
      wire(
        [
          [0, 0, -0.05],
          [0, 0, 0.05],
        ],
        uniform,
        smooth,
      ),
    ];
    const instants = instantsOf(10, timeStep);
    const skewed = { ...instants, E: instants.E.map((t, n) => (n === 4 ? t * 1.01 : t)) };
    const free = samplePoints(Int32Array.of(3, 3, 3), [0, 0, 0], [h, h, h]);
    expect(() => exactHistory(sources, vacuum, free, skewed)).toThrow(/instant 4 is .* equidistant/);
    const on = samplePoints(Int32Array.of(0, 0, 2), [0, 0, 0], [h, h, h]);
    expect(() => exactHistory(sources, vacuum, on, instants)).toThrow(/cable.*segment 1, s = 0.062/);
  });
});

describe('rules of interpolation in time', () => {
  test('a kink within a cell is no error for nodes within its parts, and a large one for centred nodes', () => {
    const step = kinked.timeScale / 10;
    const [within] = [measureRule(inCellRule(8, 1, [0]), kinked, step)];
    const across = measureRule(centredRule(8, 1), kinked, step);
    expect(within.error[2] / within.peak[2]).toBeLessThan(1e-10);
    expect(across.error[2] / across.peak[2]).toBeGreaterThan(1e-3);
  });

  test('the cheapest rule that meets the accuracy is taken, and its measured error meets it', () => {
    for (const waveform of [smooth, kinked])
      for (const accuracy of [1e-4, 1e-8, 1e-12]) {
        const { errors } = chooseRule([waveform], waveform.timeScale / 12, accuracy);
        for (const kind of [0, 1, 2] as const)
          expect(errors[0]!.error[kind] / errors[0]!.peak[kind]).toBeLessThanOrEqual(accuracy);
      }
    expect(chooseRule([smooth], smooth.timeScale / 12, 1e-4).rule.points).toBe(4);
  });
});
