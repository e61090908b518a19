import { describe, expect, test } from 'vitest';
import type { Waveform, WaveformSpec } from '../../src/scenario/waveform.ts';
import { makeWaveform } from '../../src/scenario/waveforms.ts';
import reference from '../oracle/waveforms.json' with { type: 'json' };

const ORDERS = 5;
const cases = reference as { spec: WaveformSpec; rows: number[][] }[];
const nameOf = (spec: WaveformSpec) =>
  Object.entries(spec)
    .map(([key, value]) => (key === 'type' ? value : `${key} ${value}`))
    .join(', ');

/** Instants that cover the pulse, dense against its time scale. */
function cover(w: Waveform, count = 4001): number[] {
  const end = w.lastActivity(1e-6);
  return Array.from({ length: count }, (_, n) => (n / (count - 1)) * end);
}

function peaksOf(w: Waveform): Float64Array {
  const peaks = new Float64Array(ORDERS + 1);
  const out = new Float64Array(ORDERS + 1);
  for (const t of cover(w)) {
    w.at(t, ORDERS, out);
    for (let n = 0; n <= ORDERS; n++) peaks[n] = Math.max(peaks[n]!, Math.abs(out[n]!));
  }
  return peaks;
}

describe('values against fifty-digit references', () => {
  for (const { spec, rows } of cases)
    test(nameOf(spec), () => {
      const w = makeWaveform(spec);
      const peaks = peaksOf(w);
      const out = new Float64Array(ORDERS + 1);
      const worst = new Float64Array(ORDERS + 1);
      for (const [t, ...exact] of rows) {
        w.at(t!, ORDERS, out);
        for (let n = 0; n <= ORDERS; n++) worst[n] = Math.max(worst[n]!, Math.abs(out[n]! - exact[n]!) / peaks[n]!);
      }
      console.log(
        `${nameOf(spec)}\n  q, w, w′ … w⁗: ${Array.from(worst, (x) => (x / Number.EPSILON).toFixed(1)).join(' ')} ε`,
      );
      // (t − delay)/sigma carries two roundings, which e^(−u²/2) and its polynomial multiply by at most u² + n ≤ 10 where
      // they matter; a phase 2πf(t − delay) of up to 2πf·4σ carries three more at its own size.
      const phase = spec.type === 'modulatedGaussian' ? 2 * Math.PI * spec.frequency * 4 * spec.sigma : 0;
      for (const e of worst) expect(e).toBeLessThan((24 + 3 * phase) * Number.EPSILON);
    });
});

describe('consistency', () => {
  for (const { spec } of cases) {
    const w = makeWaveform(spec);
    test(`charge, value and slope are those of at: ${nameOf(spec)}`, () => {
      const out = new Float64Array(ORDERS + 1);
      const peaks = peaksOf(w);
      for (const t of [-1e-9, ...cover(w, 301)]) {
        for (let orders = 1; orders <= ORDERS; orders++) w.at(t, orders, out);
        // Two spellings of one expression: a few roundings of the terms that make it up.
        expect(Math.abs(w.charge(t) - out[0]!)).toBeLessThanOrEqual(4 * Number.EPSILON * peaks[0]!);
        expect(Math.abs(w.value(t) - out[1]!)).toBeLessThanOrEqual(4 * Number.EPSILON * peaks[1]!);
        expect(Math.abs(w.slope(t) - out[2]!)).toBeLessThanOrEqual(8 * Number.EPSILON * peaks[2]!);
      }
    });

    test(`each order is the slope of the one before it: ${nameOf(spec)}`, () => {
      const peaks = peaksOf(w);
      const [below, here, above] = [0, 0, 0].map(() => new Float64Array(ORDERS + 1));
      const errors = [1, 2].map((halvings) => {
        const h = (0.05 * w.timeScale) / halvings;
        const worst = new Float64Array(ORDERS);
        for (const t of cover(w, 301)) {
          if (t < 0.1 * w.timeScale) continue;
          w.at(t - h, ORDERS, below!);
          w.at(t, ORDERS, here!);
          w.at(t + h, ORDERS, above!);
          for (let n = 0; n < ORDERS; n++) {
            const difference = (above![n]! - below![n]!) / (2 * h) - here![n + 1]!;
            worst[n] = Math.max(worst[n]!, Math.abs(difference) / peaks[n + 1]!);
          }
        }
        return worst;
      });
      // A central difference is of second order: halving its step divides its error by 4, from either side.
      const orders = Array.from(errors[0]!, (e, n) => Math.log2(e / errors[1]![n]!));
      console.log(`${nameOf(spec)}: orders ${orders.map((p) => p.toFixed(3)).join(' ')}`);
      for (const p of orders) {
        expect(p).toBeGreaterThan(1.95);
        expect(p).toBeLessThan(2.05);
      }
    });

    test(`peak, final charge and zero before t = 0: ${nameOf(spec)}`, () => {
      const out = new Float64Array(ORDERS + 1).fill(7);
      w.at(-1e-30, ORDERS, out);
      expect([...out]).toEqual([0, 0, 0, 0, 0, 0]);
      expect([w.value(-1), w.slope(-1), w.charge(-1)]).toEqual([0, 0, 0]);
      const peaks = peaksOf(w);
      expect(peaks[1]! / w.peak).toBeLessThanOrEqual(1 + 4 * Number.EPSILON);
      expect(peaks[1]! / w.peak).toBeGreaterThan(0.999);
      const late = spec.type === 'doubleExponential' ? 40 / spec.alpha : spec.delay + 40 * spec.sigma;
      expect(Math.abs(w.charge(late) - w.finalCharge)).toBeLessThan(8 * Number.EPSILON * peaks[0]!);
    });

    test(`last activity: ${nameOf(spec)}`, () => {
      const slopePeak = peaksOf(w)[2]!;
      for (const level of [0.1, 0.01, 1e-4, 1e-8]) {
        const last = w.lastActivity(level);
        const step = w.timeScale / 50;
        for (let n = 1; n < 500; n++)
          expect(Math.abs(w.slope(last + n * step)) / slopePeak).toBeLessThan(level * 1.001);
        expect(Math.abs(Math.abs(w.slope(last)) / slopePeak / level - 1)).toBeLessThan(1e-3);
      }
    });

    // A pulse cut by t = 0 has a front besides, which the formula leaves out by intent.
    if (w.jump < 1e-5)
      test(`highest frequency: ${nameOf(spec)}`, () => {
        const level = 0.01;
        const f = w.highestFrequency(level);
        // |ωW| by the trapezoidal rule on w′, which converges beyond rounding for pulses that vanish at both ends.
        const spectrum = (frequency: number) => {
          const end = spec.type === 'doubleExponential' ? 40 / spec.alpha : w.lastActivity(1e-15);
          const steps = Math.ceil(end / Math.min(w.timeScale / 10, 0.05 / frequency));
          let re = 0;
          let im = 0;
          for (let n = 0; n <= steps; n++) {
            const t = (n / steps) * end;
            const s = w.slope(t) * (n === 0 || n === steps ? 0.5 : 1);
            re += s * Math.cos(2 * Math.PI * frequency * t);
            im += s * Math.sin(2 * Math.PI * frequency * t);
          }
          return (Math.hypot(re, im) * end) / steps;
        };
        if (spec.type === 'doubleExponential') {
          const size = (x: number) => x / Math.sqrt((spec.alpha ** 2 + x * x) * (spec.beta ** 2 + x * x));
          const peak = size(Math.sqrt(spec.alpha * spec.beta));
          expect(Math.abs(size(2 * Math.PI * f) / peak / level - 1)).toBeLessThan(1e-12);
          expect(f).toBeGreaterThan(Math.sqrt(spec.alpha * spec.beta) / (2 * Math.PI));
        } else {
          const top = Array.from({ length: 400 }, (_, n) => spectrum((f * (n + 1)) / 400)).reduce((a, b) =>
            Math.max(a, b),
          );
          // The peak is sampled at 400 frequencies, within (1/400)² of its curvature.
          expect(Math.abs(spectrum(f) / top / level - 1)).toBeLessThan(1e-3);
          expect(spectrum(f * 1.01) / top).toBeLessThan(level);
        }
      });
  }
});

describe('closed forms and limits', () => {
  test('a Gaussian is −40 dB where x e^(−x²/2) is 0.01 of e^(−½)', () => {
    const sigma = 0.3e-9;
    const x =
      2 * Math.PI * sigma * makeWaveform({ type: 'gaussian', amplitude: 2, delay: 3e-9, sigma }).highestFrequency(0.01);
    expect(Math.abs((x * Math.exp(-0.5 * x * x)) / (0.01 * Math.exp(-0.5)) - 1)).toBeLessThan(64 * Number.EPSILON);
    expect(x).toBeGreaterThan(1);
  });

  test('a Gaussian derivative is −40 dB where x² e^(−x²/2) is 0.01 of 2/e', () => {
    const sigma = 0.189598e-9;
    const w = makeWaveform({ type: 'gaussianDerivative', amplitude: -4, delay: 0.94799e-9, sigma });
    const x = 2 * Math.PI * sigma * w.highestFrequency(0.01);
    expect(Math.abs((x * x * Math.exp(-0.5 * x * x)) / ((0.01 * 2) / Math.E) - 1)).toBeLessThan(64 * Number.EPSILON);
    expect(x).toBeGreaterThan(Math.SQRT2);
    expect(w.peak).toBe(4);
  });

  test('jump, kinks and expected order follow from the delay', () => {
    const gaussian = (u: number, amplitude = 1) => makeWaveform({ type: 'gaussian', amplitude, delay: u, sigma: 1 });
    expect(gaussian(9).kinks).toEqual([]);
    expect(gaussian(9).jump).toBeLessThan(Number.EPSILON / 2);
    expect(gaussian(5, -3).jump).toBeCloseTo(Math.exp(-12.5), 15);
    expect(gaussian(5).kinks).toEqual([0]);
    expect(gaussian(9).expectedOrder).toEqual({ order: 2, reason: 'smooth' });
    expect(gaussian(5).expectedOrder.order).toBe(2);
    expect(gaussian(1).expectedOrder.order).toBe(-1 / 3);
    const surge = makeWaveform({ type: 'doubleExponential', amplitude: 1, alpha: 1, beta: 10 });
    expect(surge).toMatchObject({ jump: 0, kinks: [0], peak: 1 });
    expect(surge.expectedOrder.order).toBe(0.34);
  });

  test('a pulse cut by t = 0 has the peak and charge of what is left', () => {
    const half = makeWaveform({ type: 'gaussian', amplitude: 1, delay: 0, sigma: 1 });
    expect(half.peak).toBe(1);
    expect(Math.abs(half.finalCharge / Math.sqrt(Math.PI / 2) - 1)).toBeLessThan(4 * Number.EPSILON);
    const tail = makeWaveform({ type: 'gaussian', amplitude: 1, delay: -6, sigma: 1 });
    expect(tail.peak).toBeCloseTo(Math.exp(-18), 20);
    // ∫₆^∞ e^(−u²/2) = √(2π)·Q(6), Q(6) = 9.86587645037698e-10 (standard normal tail, general tables)
    expect(Math.abs(tail.finalCharge / (Math.sqrt(2 * Math.PI) * 9.86587645037698e-10) - 1)).toBeLessThan(1e-14);
    const burst = { type: 'modulatedGaussian', amplitude: 1, sigma: 1, frequency: 0.25 } as const;
    for (const delay of [-0.2, -0.9, -1.7, -2.5, 0, 0.3, 5]) {
      const w = makeWaveform({ ...burst, delay });
      const sampled = Array.from({ length: 200_001 }, (_, n) => Math.abs(w.value(n * 1e-4))).reduce((a, b) =>
        Math.max(a, b),
      );
      expect(sampled).toBeLessThanOrEqual(w.peak * (1 + 4 * Number.EPSILON));
      // Sampled at 1e-4 of a pulse whose curvature is below 4 of its peak there.
      expect(sampled).toBeGreaterThan(w.peak * (1 - 1e-7));
    }
  });

  test('what is no pulse is refused', () => {
    const sound = { type: 'gaussian', amplitude: 1, delay: 1, sigma: 1 } as const;
    expect(() => makeWaveform({ ...sound, amplitude: 0 })).toThrow('amplitude is 0');
    expect(() => makeWaveform({ ...sound, sigma: -1 })).toThrow('sigma is -1 s');
    expect(() => makeWaveform({ ...sound, delay: Number.NaN })).toThrow('delay is NaN');
    expect(() => makeWaveform({ ...sound, delay: -50 })).toThrow('before t = 0');
    expect(() => makeWaveform({ ...sound, type: 'modulatedGaussian', frequency: 0 })).toThrow('frequency is 0 Hz');
    expect(() => makeWaveform({ type: 'doubleExponential', amplitude: 1, alpha: 2, beta: 1 })).toThrow('alpha < beta');
  });
});
