import { describe, expect, test } from 'vitest';
import { CHARGE, COEFFICIENTS, CURRENT, constantsOf, filamentElement, SLOPE } from '../../src/retarded/elements.ts';
import { fieldAt } from '../../src/retarded/field.ts';
import { PART_NUMBERS, PART_ROUNDING, PartSums } from '../../src/retarded/partSums.ts';
import { viewOf } from '../../src/retarded/pieceView.ts';
import { KRONROD_POINTS, kronrod } from '../../src/retarded/quadrature.ts';
import { Shelf, scalesOf, Windows } from '../../src/retarded/windows.ts';
import { circlePiece, linePiece } from '../../src/scenario/curve.ts';
import type { Vec3, WaveTerm } from '../../src/scenario/model.ts';
import { decaying, standing } from '../../src/scenario/profiles.ts';
import type { Waveform } from '../../src/scenario/waveform.ts';
import { makeWaveform } from '../../src/scenario/waveforms.ts';
import { jumping, kinked, smooth, unipolar, vacuum, wire } from './sources.ts';

const k = constantsOf(vacuum);

const waveforms: [string, Waveform][] = [
  ['gaussian derivative', smooth],
  ['gaussian that starts with a jump', jumping],
  ['gaussian', unipolar],
  ['double exponential', kinked],
  [
    'modulated gaussian',
    makeWaveform({ type: 'modulatedGaussian', amplitude: 1, delay: 4e-9, sigma: 5e-10, frequency: 2e9 }),
  ],
  ['heidler', makeWaveform({ type: 'heidler', terms: [{ amplitude: 1, tau1: 1e-9, tau2: 4e-9, n: 1.8 }] })],
  ['ramped sine', makeWaveform({ type: 'rampedSine', amplitude: 1, frequency: 1e9, ramp: 2, hold: 3 })],
  [
    'table',
    makeWaveform({
      type: 'table',
      times: Array.from({ length: 41 }, (_, n) => n * 1e-10),
      currents: Array.from({ length: 41 }, (_, n) => (n * (40 - n)) ** 2 / 160_000),
    }),
  ],
];

/** The 15 elements of a part one by one, in the words of elements.ts: ten quantities. */
function elementByElement(
  view: ReturnType<typeof viewOf>,
  terms: readonly WaveTerm[],
  waveform: Waveform,
  from: number,
  to: number,
  t: number,
): Float64Array {
  const out = new Float64Array(10);
  const element = new Float64Array(COEFFICIENTS);
  for (let m = 0; m < KRONROD_POINTS; m++) {
    const s = (from + to) / 2 + ((to - from) / 2) * kronrod.nodes[m]!;
    view.look(s);
    for (const { factor, delay, slowness, profile } of terms) {
      const u = t - delay - slowness * s - view.r / k.speed;
      const [a, slope] = profile ? [profile.value(s), profile.slope(s)] : [1, 0];
      filamentElement(k, view.x, view.y, view.z, view.sx, view.sy, view.sz, slowness, a, slope, element);
      for (let c = 0; c < 10; c++)
        out[c]! +=
          ((to - from) / 2) *
          kronrod.weights[m]! *
          factor *
          (element[CHARGE + c]! * waveform.charge(u) +
            element[CURRENT + c]! * waveform.value(u) +
            element[SLOPE + c]! * waveform.slope(u));
    }
  }
  return out;
}

const GROUPS = [
  [0, 3],
  [3, 6],
  [6, 7],
  [7, 10],
] as const;

describe('parts of filaments by the kernel', () => {
  const slow = 1 / (0.7 * vacuum.speed);
  const line = linePiece([0.01, -0.02, 0], [0.05, 0.06, 0.12], 0.03);
  const ring = circlePiece([0, 0.01, 0], [0.6, 0, 0.8], 0.05);
  const shapes: [string, typeof line | typeof ring, readonly WaveTerm[]][] = [
    ['a wave on a line', line, [{ factor: 1.3, delay: 1e-10, slowness: slow }]],
    [
      'two ways at once',
      line,
      [
        { factor: -0.8, delay: 1e-9, slowness: -slow },
        { factor: 0.7, delay: 0, slowness: slow },
        { factor: 0.2, delay: 3e-10, slowness: slow },
      ],
    ],
    ['a standing wave', line, [{ factor: 1, delay: 0, slowness: 0, profile: standing(0.5, 20) }]],
    ['a dying wave', line, [{ factor: 1, delay: 0, slowness: slow, profile: decaying(0.5, 0.1, 'forward') }]],
    ['a circle', ring, [{ factor: 1, delay: 0, slowness: 0 }]],
    ['a wave round a circle', ring, [{ factor: 1, delay: 0, slowness: slow, profile: standing(0.314, 10) }]],
  ];
  const points: Vec3[] = [
    [0.01, -0.02, 0],
    [0.05, 0.06, 0.12],
  ];
  /** From far off down to 10⁻⁴ of the wire's length beside it, and on its axis beyond its end. */
  const observers: Vec3[] = [
    [0.4, -0.3, 0.2],
    [0.031, 0.021, 0.061],
    [0.03001, 0.02001, 0.06],
    [0.09, 0.14, 0.24],
  ];

  test.each(waveforms)('%s: sums are those of the scalar formulas within the rounding told', (_, waveform) => {
    const sums = new PartSums();
    const out = new Float64Array(2 * PART_NUMBERS);
    const rows: Record<string, unknown> = {};
    for (const [name, piece, terms] of shapes) {
      let worst = 0;
      let compared = 0;
      for (const observer of observers)
        for (const [first, last] of [
          [0, 1],
          [0.2, 0.25],
          [0.5, 0.5001],
        ] as const)
          for (const late of [0.1, 0.5, 1, 2, 4, 8]) {
            const view = viewOf(piece, observer);
            const from = piece.s0 + first * piece.length;
            const to = piece.s0 + last * piece.length;
            const t = view.distance(from, to) / k.speed + late * 1e-9;
            // A part on which a kink or a seam falls is never asked for: integrals are cut there.
            const times = terms.flatMap(({ delay, slowness }) =>
              Array.from({ length: 65 }, (_, m) => {
                const s = from + ((to - from) * m) / 64;
                view.look(s);
                return t - delay - slowness * s - view.r / k.speed;
              }),
            );
            const [low, high] = [Math.min(...times), Math.max(...times)];
            const marks = [0, ...waveform.kinks, ...waveform.seams];
            if (marks.some((mark) => low <= mark && high >= mark)) continue;
            sums.integrate(
              k,
              { terms, waveform },
              view,
              from,
              to,
              t,
              { fields: true, potentials: true },
              out,
              PART_NUMBERS,
            );
            const expected = elementByElement(view, terms, waveform, from, to, t);
            GROUPS.forEach(([begin, end], g) => {
              let off = 0;
              for (let c = begin; c < end; c++) off += (out[PART_NUMBERS + c]! - expected[c]!) ** 2;
              const rounding = out[PART_NUMBERS + PART_ROUNDING + g]!;
              // Both sides are rounded.
              if (off > 0) worst = Math.max(worst, Math.sqrt(off) / (2 * rounding));
              compared++;
            });
            // What is not asked for is 0, and leaves the rest as it is.
            sums.integrate(k, { terms, waveform }, view, from, to, t, { fields: true, potentials: false }, out, 0);
            expect([...out.subarray(0, 6)]).toEqual([...out.subarray(PART_NUMBERS, PART_NUMBERS + 6)]);
            expect([...out.subarray(6, 10)]).toEqual([0, 0, 0, 0]);
          }
      rows[name] = { compared, 'difference over rounding': worst };
      if (compared > 0) expect(worst, name).toBeLessThanOrEqual(1);
    }
    console.table(rows);
    expect(Object.values(rows).filter((row) => (row as { compared: number }).compared > 0).length).toBeGreaterThan(1);
  });

  test('before a waveform has begun there is no field at all', () => {
    const out = new Float64Array(PART_NUMBERS).fill(1);
    const view = viewOf(line, [0.4, -0.3, 0.2]);
    const wanted = { fields: true, potentials: true };
    const carried = { terms: [{ factor: 1, delay: 0, slowness: 0 }], waveform: kinked };
    new PartSums().integrate(k, carried, view, line.s0, line.s0 + line.length, 1e-10, wanted, out, 0);
    expect([...out]).toEqual(new Array(PART_NUMBERS).fill(0));
  });

  test('results do not depend on what was asked before', () => {
    const source = wire(points, [{ factor: 1, delay: 0, slowness: slow }], smooth);
    const ask = (n: number) => fieldAt([source], vacuum, [0.03, 0.001 * n, 0.02], 1.9e-9, { method: 'quadrature' });
    const first = ask(7);
    for (let n = 1; n < 40; n++) ask(n);
    expect(ask(7)).toEqual(first);
  });

  test('work: elements of a slow wave at one place and instant', () => {
    const source = wire(points, [{ factor: 1, delay: 0, slowness: slow }], smooth);
    const { evaluations } = fieldAt([source], vacuum, [0.3, 0.2, 0.1], 2.5e-9, { potentials: false });
    // Two end charges; the wire is cut at the observer's foot, and its halves by the pulse's two time scales.
    expect(evaluations).toBe(2 + 4 * KRONROD_POINTS);
  });
});

describe('waveforms as polynomials', () => {
  test.each(waveforms)(
    '%s: right to the 8 roundings of its peaks that estimates count, wherever it is asked',
    (name, waveform) => {
      const memory = new ArrayBuffer(1 << 18);
      const numbers = new Float64Array(memory);
      const degrees = new Int32Array(memory);
      const windows = new Windows(waveform, new Shelf(memory, 0));
      const scales = scalesOf(waveform);
      const marks = [0, ...waveform.kinks, ...waveform.seams, 20e-9].sort((a, b) => a - b);
      let worst = 0;
      let direct = 0;
      let highest = 0;
      const trials = 2000;
      for (let n = 1; n <= trials; n++) {
        const stretch = Math.floor(((n * 0.7548776662466927) % 1) * (marks.length - 1));
        const [low, high] = [marks[stretch]!, marks[stretch + 1]!];
        if (!(high > low)) continue;
        const u = low + (high - low) * ((n * 0.5698402909980532) % 1);
        const end = Math.min(high, u + waveform.timeScale * ((n * 0.31) % 1));
        const window = windows.about(u, end);
        if (!window) {
          direct++;
          continue;
        }
        const at = window.address / 8;
        const degree = degrees[2 * at + 4]!;
        highest = Math.max(highest, degree);
        // Short of a kink, at which a derivative is that of the other side.
        for (const place of [u, (u + end) / 2, u + 0.99 * (end - u)]) {
          const x = (place - numbers[at]!) * numbers[at + 1]!;
          const [w, slope, q] = [waveform.value(place), waveform.slope(place), waveform.charge(place)];
          const rates = [slope, window.bend, w];
          [w, slope, q].forEach((exact, kind) => {
            let value = 0;
            for (let m = 0; m <= degree; m++) value = value * x + numbers[at + 4 + 3 * m + kind]!;
            // A waveform's own argument is rounded too.
            const scale = 8 * scales[kind === 2 ? 0 : kind + 1]! + 2 * place * Math.abs(rates[kind]!);
            worst = Math.max(worst, Math.abs(value - exact) / (scale * Number.EPSILON));
          });
        }
      }
      console.log(`${name}: ${worst} of what is allowed, degree ${highest} at most, ${direct} of ${trials} direct`);
      expect(worst).toBeLessThanOrEqual(1);
      // The longest stretches, of a time scale, have no window twice as long that 24 samples tell in full.
      expect(direct).toBeLessThan(trials / 5);
    },
  );

  test('a full shelf is emptied, and the same windows come again', () => {
    const memory = new ArrayBuffer(8 * 400);
    const shelf = new Shelf(memory, 0);
    const windows = new Windows(smooth, shelf);
    const read = (u: number) => {
      const { address, bend } = windows.about(u, u + 1e-11)!;
      const degree = new Int32Array(memory)[address / 4 + 4]!;
      return [bend, ...new Float64Array(memory).slice(address / 8, address / 8 + 2), degree];
    };
    const first = read(1.7e-9);
    for (let n = 0; n < 30; n++) read(1e-9 + n * 1e-10);
    expect(shelf.edition).toBeGreaterThan(0);
    expect(read(1.7e-9)).toEqual(first);
  });
});
