import { describe, expect, test } from 'vitest';
import { cos, exp, sin } from '../../src/elementary/elementary.ts';
import { EXAMPLES } from '../../src/scenario/examples.ts';
import { loadScenario } from '../../src/scenario/load.ts';
import { combOf, phasorAt } from '../../src/scenario/phasors.ts';
import { describeProblem } from '../../src/scenario/reading.ts';
import { makeWaveform } from '../../src/scenario/waveforms.ts';

/**
 * A Gaussian's lines: w = A e^(−u²/2) has W(f) = A σ√(2π) e^(−(2πfσ)²/2 − j2πf·delay) (Bracewell, The Fourier Transform and
 * Its Applications, from memory), and one period T of it is Σ I_k e^(j2πkt/T) with I_k = 2W(k/T)/T, I_0 = W(0)/T.
 */
const SIGMA = 0.1e-9;
const DELAY = 9 * SIGMA;
/** e^(−x²/2) is 1e-17 at x = 8.85: after that nothing is left of the spectrum. */
const HIGHEST = 8.85 / (2 * Math.PI * SIGMA);

function gaussianLines(step: number, { delay = DELAY, highest = HIGHEST } = {}) {
  const frequencies = Array.from({ length: Math.floor(highest / step) + 1 }, (_, k) => k * step);
  const sizes = frequencies.map(
    (f) => (f === 0 ? 1 : 2) * step * SIGMA * Math.sqrt(2 * Math.PI) * exp(-0.5 * (2 * Math.PI * f * SIGMA) ** 2),
  );
  const phase = (k: number) => 2 * Math.PI * ((frequencies[k]! * delay) % 1);
  const re = sizes.map((size, k) => size * cos(phase(k)));
  const im = sizes.map((size, k) => (k === 0 ? 0 : -size * sin(phase(k))));
  return { frequencies, re, im };
}

describe('a pulse out of its lines', () => {
  test('value, charge and four derivatives of a Gaussian, over its period and after', () => {
    const period = 20 * SIGMA;
    const lines = gaussianLines(1 / period);
    const sum = makeWaveform({ type: 'phasors', ...lines, scale: 1 });
    const closed = makeWaveform({ type: 'gaussian', amplitude: 1, sigma: SIGMA, delay: DELAY });
    const [a, b] = [new Float64Array(6), new Float64Array(6)];
    const worst = new Float64Array(6);
    const largest = new Float64Array(6);
    for (let n = 0; n <= 400; n++) {
      sum.at((n * period) / 400, 5, a);
      closed.at((n * period) / 400, 5, b);
      for (let order = 0; order < 6; order++) {
        worst[order] = Math.max(worst[order]!, Math.abs(a[order]! - b[order]!));
        largest[order] = Math.max(largest[order]!, Math.abs(b[order]!));
      }
    }
    const rows = Array.from(worst, (x, order) => ({ order: order - 1, relative: x / largest[order]! }));
    console.table(rows);
    // A rounding for each of 28 lines and two for each step of the turning factor; lines of order n weigh up to
    // Σ ωⁿW / max|w⁽ⁿ⁾| = 1 in the sum at the pulse, where all have one phase.
    for (const { order, relative } of rows) expect(relative, `${order}`).toBeLessThan(3 * 28 * Number.EPSILON);
    expect(Math.abs(sum.peak - 1)).toBeLessThan(1e-14);
    expect(Math.abs(sum.timeScale / (SIGMA * exp(0.5)) - 1)).toBeLessThan(1e-12);
    expect(sum.kinks).toEqual([]);
    expect(sum.expectedOrder.order).toBe(2);
    expect(sum.value(-1e-12)).toBe(0);
    expect(sum.value(period)).toBe(0);
    expect(Math.abs(sum.charge(2 * period) / closed.finalCharge - 1)).toBeLessThan(1e-14);
    expect(sum.finalCharge).toBe(sum.charge(period));
    // 1 % of the largest slope: the same instant as the closed form's
    expect(Math.abs(sum.lastActivity(0.01) - closed.lastActivity(0.01))).toBeLessThan(1e-6 * SIGMA);
    // −40 dB of |ωW|, to the line below
    const exact = closed.highestFrequency(0.01);
    expect(sum.highestFrequency(0.01)).toBeLessThanOrEqual(exact);
    expect(sum.highestFrequency(0.01)).toBeGreaterThan(exact - 1 / period);
  });

  test('a band that does not begin at 0: a burst', () => {
    const spec = {
      type: 'modulatedGaussian',
      amplitude: 1,
      sigma: 4 * SIGMA,
      delay: 36 * SIGMA,
      frequency: 5e9,
    } as const;
    const period = 80 * SIGMA;
    // sin: (e^(jΩ) − e^(−jΩ))/2j, its lines those of the Gaussian about 5 GHz, turned by −j
    const first = Math.ceil((5e9 - HIGHEST / 4) * period);
    const frequencies = Array.from({ length: 2 * (5e9 * period - first) + 1 }, (_, n) => (first + n) / period);
    const sizes = frequencies.map(
      (f) => (1 / period) * 4 * SIGMA * Math.sqrt(2 * Math.PI) * exp(-0.5 * (2 * Math.PI * (f - 5e9) * 4 * SIGMA) ** 2),
    );
    const sum = makeWaveform({
      type: 'phasors',
      frequencies,
      // sin(2πf(t − delay)) has its carrier's phase at `delay`
      re: sizes.map((size, n) => size * cos(-2 * Math.PI * (((frequencies[n]! * spec.delay) % 1) + 0.25))),
      im: sizes.map((size, n) => size * sin(-2 * Math.PI * (((frequencies[n]! * spec.delay) % 1) + 0.25))),
      scale: 1,
    });
    const closed = makeWaveform(spec);
    let worst = 0;
    for (let n = 0; n <= 500; n++) {
      const t = (n * period) / 500;
      worst = Math.max(
        worst,
        Math.abs(sum.value(t) - closed.value(t)),
        Math.abs(sum.slope(t) - closed.slope(t)) / 3e10,
      );
    }
    console.log(`burst, ${frequencies.length} lines from ${first}: ${worst.toExponential(1)}`);
    // phases of up to 2π·5e9·delay = 113 rad, a rounding each
    expect(worst).toBeLessThan(256 * Number.EPSILON);
  });

  test.each([
    [[0, 1e9, 2e9, 3e9], { step: 1e9, first: 1, count: 3 }],
    [[1e9, 2e9, 3e9], { step: 1e9, first: 1, count: 3 }],
    [[0, 5e8], { step: 5e8, first: 1, count: 1 }],
    [[3e9, 3.5e9, 4e9], { step: 5e8, first: 6, count: 3 }],
    [[1e9 + 1e3, 2e9, 3e9], { step: 1e9, first: 1, count: 3 }],
  ])('frequencies %j are multiples of a step', (frequencies, comb) => {
    expect(combOf(frequencies)).toEqual(comb);
  });

  test.each([
    [[1e9], 'one frequency alone'],
    [[0], 'one frequency alone'],
    [[1e9, 2e9, 3.1e9], 'without gaps: 1 GHz is not 1 times 1.03333 GHz'],
    [[1e9, 2.5e9, 4e9], 'without gaps'],
    [[0, 2e9, 3e9], 'without gaps'],
    [[1e9, 1e9 + 1e4], 'the limit is 10000 times'],
  ])('frequencies %j make no pulse', (frequencies, reason) => {
    expect(combOf(frequencies)).toEqual({ reason: expect.stringContaining(reason) });
  });

  test('a question between lines is refused with its neighbours', () => {
    const spec = { type: 'phasors', frequencies: [0, 1e9, 2e9], re: [0, 1, 2], im: [0, 3, 4], scale: 1 } as const;
    expect(phasorAt(spec, 1e9 * (1 + 1e-12))).toEqual([1, 3]);
    expect(() => phasorAt(spec, 1.25e9)).toThrow(
      'frequency is 1.25 GHz, at which a current that is given by frequency is not known; nearest it is known at 1 GHz and 2 GHz.',
    );
    expect(() => phasorAt(spec, 1e6)).toThrow('known at 1 GHz.');
    expect(() => phasorAt(spec, 3e9)).toThrow('known at 2 GHz.');
  });
});

describe('a wire whose current is given by frequency', () => {
  /** The bench cable, 0.1 m, with phasors [1, 0.5, 0] times those of a Gaussian. */
  const cable = ({ step = 1 / 3.2e-9, shape = [1, 0.5, 0], direct = true, change = {}, ...lines }: Given = {}) => {
    const { frequencies, re, im } = gaussianLines(step, lines);
    const phasors = frequencies.map((f, k) => [f, ...shape.flatMap((part) => [part * re[k]!, part * im[k]!])]);
    const scenario = structuredClone(EXAMPLES['bench-cable-pulse']) as unknown as { sources: [{ current: unknown }] };
    scenario.sources[0].current = {
      profile: 'sampled',
      positions: [0, '50 mm', '100 mm'],
      phasors: direct ? phasors : phasors.slice(1),
      ...change,
    };
    return scenario;
  };
  interface Given {
    step?: number;
    shape?: number[];
    direct?: boolean;
    delay?: number;
    highest?: number;
    change?: object;
  }

  test('one filament for each station with current, as in time; what was made of the lines is noted', () => {
    const loaded = loadScenario(cable());
    if ('problems' in loaded) throw new Error(loaded.problems.map(describeProblem).join('\n'));
    const { sources, notes } = loaded.scenario;
    expect(sources.map(({ name }) => name)).toEqual(['cable, s = 0 m', 'cable, s = 50 mm']);
    expect(sources.map(({ waveform }) => Number(waveform.value(DELAY).toFixed(12)))).toEqual([1, 0.5]);
    expect(notes).toEqual([
      'The current of “cable” is the sum of 45 lines 312.5 MHz apart, 312.5 MHz to 14.06 GHz, over one period, 3.2 ns.',
    ]);
  });

  test.each<[string, Given, string, RegExp]>([
    [
      'too short a period',
      { step: 0.5e9 },
      '',
      /repeat after 2 ns; the duration is 3 ns; give them at steps of at most 333.3 MHz/,
    ],
    ['a band cut off', { highest: 5e9 }, '', /end at 5 GHz with 0\.0\d+ of the largest \|f·I\|; the limit is 0.001/],
    ['no 0 Hz', { direct: false }, '', /start at t = 0 with .* give 0 Hz too, taken as 0 A now \(78\.33 mA there/],
    ['a pulse about t = 0', { delay: 0 }, '', /start at t = 0 with 1 of the peak.* delay the pulse/],
    ['a pulse too early', { delay: 2 * SIGMA }, '', /start at t = 0 with 0.14 of the peak/],
    [
      'rows out of order',
      {
        change: {
          phasors: [
            [2e9, ...Array(6).fill(1)],
            [1e9, ...Array(6).fill(1)],
          ],
        },
      },
      '.1.0',
      /is 1 GHz; .* rise from row to row/,
    ],
    ['a negative frequency', { change: { phasors: [[-1e9, ...Array(6).fill(1)]] } }, '.0.0', /must be 0 or more/],
    [
      'a turned phasor at 0 Hz',
      {
        change: {
          phasors: [
            [0, 1, 0, 1, 0.5, 0, 0],
            [1e9, ...Array(6).fill(1)],
          ],
        },
      },
      '.0.4',
      /is 0.5 A, an imaginary part at 0 Hz/,
    ],
    [
      'a short row',
      { change: { phasors: [[1e9, 1, 1]] } },
      '.0',
      /has 3 numbers; it must have a frequency and 6 currents/,
    ],
    ['a length', { change: { phasors: [['1 m', ...Array(6).fill(1)]] } }, '.0.0', /it must be a frequency/],
    ['no current', { shape: [0, 0, 0] }, '', /are 0 everywhere/],
    [
      'one frequency',
      { change: { phasors: [[1e9, ...Array(6).fill(1)]] } },
      '',
      /give one frequency alone.*`exact --frequencies` or `derive --steady`/,
    ],
  ])('%s is refused in time', (_, given, path, words) => {
    const loaded = loadScenario(cable(given));
    expect(loaded).toHaveProperty('problems');
    const problems = 'problems' in loaded ? loaded.problems : [];
    expect(problems.map((problem) => problem.path)).toEqual([`sources.0.current.phasors${path}`]);
    expect(problems[0]!.message).toMatch(words);
  });

  test.each<[string, Given]>([
    ['too short a period', { step: 0.5e9 }],
    ['a band cut off', { highest: 5e9 }],
    ['no 0 Hz', { direct: false }],
    ['one frequency', { change: { phasors: [[1e9, ...Array(6).fill(1)]] } }],
  ])('%s is no matter where frequencies alone are asked for', (_, given) => {
    const loaded = loadScenario(cable(given), 'frequency');
    if ('problems' in loaded) throw new Error(loaded.problems.map(describeProblem).join('\n'));
    expect(loaded.scenario.sources.length).toBeGreaterThan(0);
    expect(() => loaded.scenario.sources[0]!.waveform.value(0)).toThrow('read for questions by frequency alone');
  });

  test('tables stand alone', () => {
    for (const [change, path, words] of [
      [{ phasors: undefined }, 'samples', 'must have samples or phasors or name a file'],
      [{ samples: Array(3).fill([0, 0, 0, 0]) }, 'phasors', 'stands beside samples'],
      [{ positions: undefined }, 'positions', 'must have the arc lengths'],
      [{ phasors: undefined, file: 'a.csv' }, 'file', 'read by the command line alone'],
    ] as const) {
      const loaded = loadScenario(JSON.parse(JSON.stringify(cable({ change }))));
      const problems = 'problems' in loaded ? loaded.problems : [];
      expect(problems.map((problem) => problem.path)).toEqual([`sources.0.current.${path}`]);
      expect(problems[0]!.message).toContain(words);
    }
  });
});
