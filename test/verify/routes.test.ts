import { uniformFloat64 } from 'pure-rand/distribution/uniformFloat64';
import { xoroshiro128plus } from 'pure-rand/generator/xoroshiro128plus';
import { describe, expect, test } from 'vitest';
import { cos, sin } from '../../src/elementary/elementary.ts';
import { type FieldValue, fieldOf } from '../../src/retarded/field.ts';
import { prepareSources } from '../../src/retarded/prepare.ts';
import { fieldBySpectrum, type SpectralValue, steadyField } from '../../src/retarded/spectral.ts';
import type { Complex } from '../../src/retarded/waveformSpectrum.ts';
import { disagreement } from '../../src/run/routes.ts';
import { mediumOf } from '../../src/scenario/constants.ts';
import { firstArrival } from '../../src/scenario/distance.ts';
import type { Medium, Source, Vec3 } from '../../src/scenario/model.ts';
import { decaying, hat, standing } from '../../src/scenario/profiles.ts';
import type { Waveform } from '../../src/scenario/waveform.ts';
import { makeWaveform } from '../../src/scenario/waveforms.ts';
import { centreFed, difference, dipole, loop, size, travelling, uniform, vacuum, wire } from '../retarded/sources.ts';

/**
 * Three routes to one field: retarded integrals by adaptive quadrature, spectra and back, closed forms where there are
 * some; and the fields as derivatives of each route's own potentials.
 */

const SIGMA = 0.19e-9;
const dense = mediumOf(2.25, 1.4);

/** Bent, so that nothing is symmetric. */
const BENT: readonly Vec3[] = [
  [0, 0, -0.05],
  [0.02, 0, 0],
  [0, 0.03, 0.05],
];

type Build = (waveform: Waveform, medium: Medium) => Source[];
const SOURCES: readonly (readonly [string, Build])[] = [
  ['dipole', (w) => [dipole([1e-3, 0, 0], [0, 0.6, 0.8], 1e-3, w)]],
  ['uniform wire', (w) => [wire(BENT, uniform, w)]],
  ['wave at v', (w, medium) => [wire(BENT, travelling(1, medium), w)]],
  ['slow wave', (w, medium) => [wire(BENT, travelling(0.55, medium), w)]],
  ['centre-fed', (w, medium) => centreFed([0, 0, 0], [0.48, 0.36, 0.8], 0.05, w, medium)],
  ['loop', (w) => [loop([0, 0, 0], [0, 0.6, 0.8], 0.04, w)]],
  [
    'standing, decaying, sampled',
    (w, medium) => {
      const bent = wire(BENT, [], w);
      const { length } = bent.curve;
      const terms = [
        { factor: 1, delay: 0, slowness: 0, profile: standing(length, 40) },
        { factor: -0.5, delay: 1e-10, slowness: 1 / medium.speed, profile: decaying(length, 0.06, 'forward') },
        { factor: 0.7, delay: 0, slowness: 0, profile: hat([0, 0.02, 0.05, length], 2) },
      ] as const;
      return [{ ...bent, terms }];
    },
  ],
];

const PULSES: readonly (readonly [string, number, (delay: number) => Waveform])[] = [
  ['gaussian', 8, (delay) => makeWaveform({ type: 'gaussian', amplitude: 1, sigma: SIGMA, delay })],
  ['derivative', 8, (delay) => makeWaveform({ type: 'gaussianDerivative', amplitude: -2, sigma: SIGMA, delay })],
  [
    'burst',
    9,
    (delay) =>
      makeWaveform({ type: 'modulatedGaussian', amplitude: 1, sigma: 2 * SIGMA, delay: 2 * delay, frequency: 2e9 }),
  ],
];

const POINTS: readonly Vec3[] = [
  [0.012, 0.004, 0.01],
  [0.06, -0.07, 0.05],
  [-0.8, 1.1, 0.9],
];

/** Instants at each point, over the pulse and what it leaves. */
const INSTANTS = 12;

/** Waves at full speed: the others have no closed form beside what all routes begin with. */
const CLOSED = ['wave at v', 'centre-fed'];

/** Weights of the eighth-order central difference at 1 … 4 steps (Fornberg 1988, from memory). */
const EIGHTH = [4 / 5, -1 / 5, 4 / 105, -1 / 280];

type Value = Pick<FieldValue, 'E' | 'B' | 'phi' | 'A'>;

/** |E + ∇φ + ∂A/∂t|, v|B − ∇×A| and v|∇·A + φ̇/v²|, relative to the largest part of E there. */
function residuals(at: (point: Vec3, t: number) => Value, point: Vec3, t: number, step: number, speed: number) {
  const offsets = EIGHTH.flatMap((_, m) => [(m + 1) * step, -(m + 1) * step]);
  const slope = (values: readonly Value[], read: (v: Value) => number) =>
    EIGHTH.reduce((sum, w, m) => sum + (w * (read(values[2 * m]!) - read(values[2 * m + 1]!))) / step, 0);
  const axes = [0, 1, 2] as const;
  const along = axes.map((a) =>
    offsets.map((offset) => at(point.map((x, b) => (a === b ? x + offset : x)) as unknown as Vec3, t)),
  );
  const later = offsets.map((offset) => at(point, t + offset / speed));
  const gradient = axes.map((a) => slope(along[a]!, ({ phi }) => phi));
  const growth = axes.map((a) => speed * slope(later, ({ A }) => A[a]!));
  const turn = axes.map((a) => {
    const [b, c] = [(a + 1) % 3, (a + 2) % 3];
    return slope(along[b]!, ({ A }) => A[c]!) - slope(along[c]!, ({ A }) => A[b]!);
  });
  const decay = slope(later, ({ phi }) => phi) / speed;
  const gauge = axes.reduce((sum, a) => sum + slope(along[a]!, ({ A }) => A[a]!), decay);
  const value = at(point, t);
  const vec = (list: number[]) => list as unknown as Vec3;
  const scale = Math.max(size(vec(gradient)), size(vec(growth)), size(value.B) * speed);
  return {
    E: difference(vec(gradient.map((x, a) => -x - growth[a]!)), value.E) / scale,
    B: (difference(vec(turn), value.B) * speed) / scale,
    gauge: (Math.abs(gauge) * speed) / scale,
  };
}

describe('three routes to one field', () => {
  test.each([
    ['vacuum', vacuum, PULSES],
    ['εr 2.25, μr 1.4', dense, PULSES.slice(0, 1)],
  ] as const)('retarded integrals, spectra and closed forms agree to 1e-8 of the peak, in %s', (_, medium, pulses) => {
    const rows: Record<string, Record<string, string>> = {};
    for (const [name, build] of SOURCES) {
      const worst = { 'spectral − retarded': 0, 'closed − quadrature': 0, 'spectral − closed': 0, 'error / bound': 0 };
      for (const [, delays, pulse] of pulses) {
        const waveform = pulse(delays * SIGMA);
        const sources = build(waveform, medium);
        const best = fieldOf(prepareSources(sources, medium, 'best'));
        const quadrature = fieldOf(prepareSources(sources, medium, 'quadrature'));
        const window = 2 * delays * SIGMA + 12 * SIGMA + 0.5e-9;
        const spectral = fieldBySpectrum(sources, medium, window);
        for (const point of POINTS) {
          const start = firstArrival(sources, medium, point);
          const times = Array.from({ length: INSTANTS }, (_, n) => start + (window * (n + 0.3)) / INSTANTS);
          const { values, peaks } = spectral(point, times);
          const closed = times.map((t) => best(point, t));
          const integrals = CLOSED.includes(name) ? times.map((t) => quadrature(point, t)) : closed;
          const here = { ...peaks(), distance: 0 };
          const all = times.map(() => here);
          const apart = (a: readonly (FieldValue | SpectralValue)[], b: readonly (FieldValue | SpectralValue)[]) =>
            Math.max(...disagreement(a, b, all, medium).map(({ largest }) => largest));
          const raise = (key: keyof typeof worst, value: number) => {
            worst[key] = Math.max(worst[key], value);
          };
          raise('spectral − retarded', apart(values, integrals));
          if (CLOSED.includes(name)) {
            raise('closed − quadrature', apart(closed, integrals));
            raise('spectral − closed', apart(values, closed));
          }
          values.forEach((value, n) => {
            const own = closed[n]!;
            raise('error / bound', difference(value.E, own.E) / (value.errorE + own.errorE));
            raise('error / bound', difference(value.H, own.H) / (value.errorH + own.errorH));
          });
        }
      }
      rows[name] = Object.fromEntries(
        Object.entries(worst).map(([key, value]) => [key, value === 0 ? '—' : value.toExponential(1)]),
      );
      for (const key of ['spectral − retarded', 'closed − quadrature', 'spectral − closed'] as const)
        expect(worst[key], `${name}, ${key}`).toBeLessThan(1e-8);
      expect(worst['error / bound'], name).toBeLessThanOrEqual(1);
    }
    console.table(rows);
  });

  test('E = −∇φ − ∂A/∂t, B = ∇×A and the gauge hold for the potentials of each route', () => {
    const rng = xoroshiro128plus(812);
    const real = (from: number, to: number) => from + (to - from) * uniformFloat64(rng);
    const rows: Record<string, Record<string, string>> = {};
    for (const [name, build] of SOURCES) {
      const waveform = PULSES[0]![2](9 * SIGMA);
      const sources = build(waveform, vacuum);
      const spectral = fieldBySpectrum(sources, vacuum, 4e-9);
      const routes = {
        retarded: fieldOf(prepareSources(sources, vacuum, 'best'), { tolerance: 1e-14 }),
        spectral: (point: Vec3, t: number) => spectral(point, [t]).values[0]!,
      };
      const row: Record<string, string> = {};
      for (const [route, at] of Object.entries(routes)) {
        const worst = { E: 0, B: 0, gauge: 0 };
        for (let n = 0; n < 2; n++) {
          const point: Vec3 = [real(0.07, 0.12), real(0.07, 0.12), real(-0.12, 0.12)];
          const found = residuals(at, point, 9 * SIGMA + 0.3e-9 + real(0, 0.4e-9), 1e-3, vacuum.speed);
          for (const key of ['E', 'B', 'gauge'] as const) worst[key] = Math.max(worst[key], found[key]);
        }
        for (const [key, value] of Object.entries(worst)) {
          row[`${route}: ${key}`] = value.toExponential(1);
          // 1 mm over the nearest scale, 60 mm of v·sigma: of eighth order, far below; 1e-13 of a potential over 1 mm, where
          // the field is a potential over 60 mm, is 6e-12.
          expect(value, `${name}, ${route}, ${key}`).toBeLessThan(1e-9);
        }
      }
      rows[name] = row;
    }
    console.table(rows);
  });
});

test('kinks: a spectrum that is cut off says by how much', () => {
  const kinked = makeWaveform({ type: 'doubleExponential', amplitude: 1, alpha: 1e9, beta: 1e10 });
  const sources = [wire(BENT, travelling(0.55, vacuum), kinked)];
  const point: Vec3 = [0.06, -0.07, 0.05];
  const start = firstArrival(sources, vacuum, point);
  const exact = fieldOf(prepareSources(sources, vacuum, 'best'));
  const { values, peaks } = fieldBySpectrum(
    sources,
    vacuum,
    2e-9,
  )(
    point,
    [0.3, 0.7, 1.1, 1.9].map((part) => start + part * 1e-9),
  );
  const rows = values.map(({ E, errorE }, n) => {
    const own = exact(point, start + [0.3, 0.7, 1.1, 1.9][n]! * 1e-9);
    return { error: difference(E, own.E) / peaks().E, bound: errorE / peaks().E };
  });
  console.table(rows);
  for (const { error, bound } of rows) expect(error).toBeLessThanOrEqual(bound);
});

const times = (a: Complex, b: Complex): Complex => [a[0] * b[0] - a[1] * b[1], a[0] * b[1] + a[1] * b[0]];
const turned = (phase: number, gain = 1): Complex => [gain * cos(phase), gain * sin(phase)];
const sumOf = (...list: Complex[]): Complex => [
  list.reduce((s, [re]) => s + re, 0),
  list.reduce((s, [, im]) => s + im, 0),
];
const apartBy = (a: Complex, b: Complex) => Math.sqrt((a[0] - b[0]) ** 2 + (a[1] - b[1]) ** 2);
const sizeOf = (list: readonly Complex[]) => Math.sqrt(list.reduce((s, [re, im]) => s + re * re + im * im, 0));

describe('the steady state', () => {
  const pulse = makeWaveform({ type: 'gaussian', amplitude: 3, sigma: SIGMA, delay: 9 * SIGMA });

  test('a Hertzian dipole (Balanis, Antenna Theory, 4th ed., eqs. 4-8 and 4-10, from memory)', () => {
    const l = 2e-3;
    const at = steadyField([dipole([0, 0, 0], [0, 0, 1], l, pulse)], vacuum);
    let worst = 0;
    for (const frequency of [1e6, 0.3e9, 2.7e9])
      for (const theta of [0.1, 0.9, 1.6, 2.8])
        for (const r of [0.004, 0.1, 2]) {
          const k = (2 * Math.PI * frequency) / vacuum.speed;
          const found = at([r * sin(theta), 0, r * cos(theta)], frequency);
          const wave = turned(-k * r, 3 * l);
          const Er = times(times(wave, [1, -1 / (k * r)]), [
            (vacuum.impedance * cos(theta)) / (2 * Math.PI * r * r),
            0,
          ]);
          const j: Complex = [0, (vacuum.impedance * k * sin(theta)) / (4 * Math.PI * r)];
          const Et = times(times(wave, [1 - 1 / (k * r) ** 2, -1 / (k * r)]), j);
          const Hp = times(times(wave, [1, -1 / (k * r)]), [0, (k * sin(theta)) / (4 * Math.PI * r)]);
          const [Ex, , Ez] = found.E;
          const scale = sizeOf([Er, Et]);
          worst = Math.max(
            worst,
            apartBy(sumOf(times(Ex!, [sin(theta), 0]), times(Ez!, [cos(theta), 0])), Er) / scale,
            apartBy(sumOf(times(Ex!, [cos(theta), 0]), times(Ez!, [-sin(theta), 0])), Et) / scale,
            (apartBy(found.H[1]!, Hp) * vacuum.impedance) / scale,
          );
          expect(found.errorE).toBeLessThan(1e-12 * scale);
        }
    console.log(`dipole: ${worst.toExponential(1)}`);
    expect(worst).toBeLessThan(1e-13);
  });

  test('a sinusoidal current: three spherical waves (Balanis, eqs. 4-67 … 8-13; Schelkunoff & Friis 1952; from memory)', () => {
    const L = 0.16;
    let worst = 0;
    for (const frequency of [0.6e9, 0.9368e9, 2.1e9]) {
      const k = (2 * Math.PI * frequency) / vacuum.speed;
      const { curve, ...rest } = wire(
        [
          [0, 0, -L / 2],
          [0, 0, L / 2],
        ],
        [],
        pulse,
      );
      const profile = standing(curve.length, k);
      const at = steadyField([{ ...rest, curve, terms: [{ factor: 1, delay: 0, slowness: 0, profile }] }], vacuum);
      for (const [rho, z] of [
        [1e-3, 0.05],
        [1e-3, 0.081],
        [0.03, 0.01],
        [0.02, -0.2],
        [1.5, 0.7],
      ] as const) {
        const found = at([0.6 * rho, 0.8 * rho, z], frequency);
        const r1 = Math.sqrt(rho * rho + (z - L / 2) ** 2);
        const r2 = Math.sqrt(rho * rho + (z + L / 2) ** 2);
        const r0 = Math.sqrt(rho * rho + z * z);
        const middle = -2 * cos((k * L) / 2);
        const wave = (r: number, gain: number) => turned(-k * r, gain);
        const j = (gain: number): Complex => [0, gain];
        const Ez = times(
          j((-vacuum.impedance * 3) / (4 * Math.PI)),
          sumOf(wave(r1, 1 / r1), wave(r2, 1 / r2), wave(r0, middle / r0)),
        );
        const Er = times(
          j((vacuum.impedance * 3) / (4 * Math.PI * rho)),
          sumOf(wave(r1, (z - L / 2) / r1), wave(r2, (z + L / 2) / r2), wave(r0, (middle * z) / r0)),
        );
        const Hp = times(j(3 / (4 * Math.PI * rho)), sumOf(wave(r1, 1), wave(r2, 1), wave(r0, middle)));
        const radial = sumOf(times(found.E[0]!, [0.6, 0]), times(found.E[1]!, [0.8, 0]));
        const azimuthal = sumOf(times(found.H[0]!, [-0.8, 0]), times(found.H[1]!, [0.6, 0]));
        const scale = sizeOf([Ez, Er]);
        worst = Math.max(
          worst,
          apartBy(found.E[2]!, Ez) / scale,
          apartBy(radial, Er) / scale,
          (apartBy(azimuthal, Hp) * vacuum.impedance) / scale,
        );
      }
    }
    console.log(`sinusoidal current: ${worst.toExponential(1)}`);
    // The closed form itself cancels near the wire: 1/ρ times sums of order one, against a field of about 1/(kρ) of them.
    expect(worst).toBeLessThan(1e-11);
  });

  test('a sine that has been on for long enough is the steady state', () => {
    const frequency = 1.3e9;
    const omega = 2 * Math.PI * frequency;
    const waveform = makeWaveform({ type: 'rampedSine', amplitude: 3, frequency, ramp: 4, hold: 6 });
    const sources = SOURCES[6]![1](waveform, vacuum);
    const point: Vec3 = [0.06, -0.07, 0.05];
    const phasors = steadyField(sources, vacuum)(point, frequency);
    const field = fieldOf(prepareSources(sources, vacuum, 'best'), { tolerance: 1e-12 });
    // Charge keeps a constant beside its oscillation, so E does; B has no memory.
    let worst = 0;
    for (const t of [4.1e-9, 4.4e-9, 5.3e-9]) {
      const { B } = field(point, t);
      // sin ωt is the imaginary part of e^(jωt)
      const steady = phasors.B.map(([re, im]) => re * sin(omega * t) + im * cos(omega * t)) as unknown as Vec3;
      worst = Math.max(worst, difference(B, steady) / sizeOf(phasors.B));
    }
    console.log(`ramped sine: ${worst.toExponential(1)}`);
    expect(worst).toBeLessThan(1e-11);
  });

  test('a frequency of 0 and a point on the source are refused', () => {
    const at = steadyField([wire(BENT, uniform, pulse)], vacuum);
    expect(() => at([1, 1, 1], 0)).toThrow('frequency is 0 Hz');
    expect(() => at([0, 0, -0.05], 1e9)).toThrow('source “cable”');
    const bySpectrum = fieldBySpectrum([wire(BENT, uniform, pulse)], vacuum, 1e-9);
    expect(() => bySpectrum([1, 1, 1], [9e-9])).toThrow('beyond the window');
    expect(() => bySpectrum([0.02, 0, 0], [1e-9])).toThrow('source “cable”');
    expect(bySpectrum([1, 1, 1], [1e-9]).values[0]!.E).toEqual([0, 0, 0]);
  });
});
