import { describe, expect, test } from 'vitest';
import { amplitudeOf, bandAbove, pulseLevel, steadyLevel } from '../../src/derived/levels.ts';
import { pulseAt } from '../../src/derived/pulse.ts';
import { decibels } from '../../src/elementary/elementary.ts';
import { steadyField } from '../../src/retarded/spectral.ts';
import type { Vec3 } from '../../src/scenario/model.ts';
import { makeWaveform } from '../../src/scenario/waveforms.ts';
import { centreFed, dipole, kinked, smooth, unipolar, vacuum } from '../retarded/sources.ts';

const SIGMA = 0.19e-9;

describe('peak and rise time at a point', () => {
  test('far off a dipole: those of I′, a Gaussian’s second derivative for the derivative pulse', () => {
    // E ∝ (1 − u²) e^(−u²/2): the peak 1 at u = 0; it rises from 10 % to 90 % between the roots of that.
    const share = (u: number) => (1 - u * u) * Math.exp(-0.5 * u * u);
    const root = (level: number) => {
      let [low, high] = [-1, 0];
      for (let n = 0; n < 60; n++) {
        const middle = (low + high) / 2;
        if (share(middle) < level) low = middle;
        else high = middle;
      }
      return low;
    };
    const r = 1000;
    const l = 1e-3;
    const { E, H } = pulseAt([dipole([0, 0, 0], [0, 0, 1], l, smooth)], vacuum)([r, 0, 0]);
    const rise = (root(0.9) - root(0.1)) * SIGMA;
    // −E_z = μ l I′/(4πr), I′ = −√e A/σ at the peak
    const peak = (vacuum.permeability * l * Math.sqrt(Math.E)) / (SIGMA * 4 * Math.PI * r);
    console.table({ E, H, expected: { peak, riseTime: rise, peakTime: 9 * SIGMA + r / vacuum.speed } });
    expect(E!.component).toBe('Ez');
    expect(E!.peak / peak).toBeCloseTo(1, 4);
    expect(E!.riseTime / rise).toBeCloseTo(1, 3);
    expect(E!.peakTime - r / vacuum.speed).toBeCloseTo(9 * SIGMA, 13);
    expect(H!.component).toBe('Hy');
    expect((H!.peak * vacuum.impedance) / -E!.peak).toBeCloseTo(1, 4);
    expect(H!.riseTime / rise).toBeCloseTo(1, 3);
  });

  test('on the axis of a dipole there is no H, and of a current that stops E keeps what its charge leaves', () => {
    const { E, H } = pulseAt([dipole([0, 0, 0], [0, 0, 1], 1e-3, unipolar)], vacuum)([0, 0, 1e-3]);
    expect(H).toBeNull();
    // 2 q l/(4πε r³), reached for ever
    const q = SIGMA * Math.sqrt(2 * Math.PI);
    expect((E!.peak * 4 * Math.PI * vacuum.permittivity * 1e-9) / (2 * q * 1e-3)).toBeCloseTo(1, 2);
  });

  test('samples do not decide: the same to rounding wherever they fall', () => {
    const at: Vec3 = [0.06, -0.03, 0.02];
    const early = pulseAt(centreFed([0, 0, 0], [0.48, 0.36, 0.8], 0.05, smooth), vacuum)(at).E!;
    const later = makeWaveform({ type: 'gaussianDerivative', amplitude: 1, sigma: SIGMA, delay: 9.37 * SIGMA });
    const late = pulseAt(centreFed([0, 0, 0], [0.48, 0.36, 0.8], 0.05, later), vacuum)(at).E!;
    expect(late.peak / early.peak).toBeCloseTo(1, 11);
    expect(late.riseTime / early.riseTime).toBeCloseTo(1, 9);
    expect((late.peakTime - early.peakTime) / (0.37 * SIGMA)).toBeCloseTo(1, 5);
  });

  test('a field that jumps does not rise from below 10 %', () => {
    const { E } = pulseAt([dipole([0, 0, 0], [0, 0, 1], 1e-3, kinked)], vacuum)([1, 0, 0]);
    expect(E!.riseTime).toBeNaN();
  });
});

describe('levels', () => {
  test('dBµV/m of a sine, dBµV/m/MHz of a pulse', () => {
    // 1 V/m root mean square is 120 dBµV/m.
    expect(steadyLevel(Math.SQRT2)).toBeCloseTo(120, 12);
    // A pulse of 1 µV/m·µs in a bandwidth of 1 MHz: √2 µV/m root mean square, 3 dB.
    expect(pulseLevel(1e-6 * 1e-6)).toBeCloseTo(decibels(Math.SQRT2), 12);
    expect(steadyLevel(0)).toBe(Number.NEGATIVE_INFINITY);
  });

  test('the spectrum at a point is the Fourier integral of what is felt there', () => {
    // Far off a dipole E_z(f) = −jωμ l W/(4πr) e^(−jkr).
    const [l, r, f] = [1e-3, 1000, 0.7e9];
    const { E } = steadyField([dipole([0, 0, 0], [0, 0, 1], l, unipolar)], vacuum, 'pulse')([r, 0, 0], f);
    const w = 2 * Math.PI * f;
    const W = SIGMA * Math.sqrt(2 * Math.PI) * Math.exp(-0.5 * (w * SIGMA) ** 2);
    expect(amplitudeOf(E) / ((w * vacuum.permeability * l * W) / (4 * Math.PI * r))).toBeCloseTo(1, 6);
  });

  test('a band is where amplitudes cross its level on logarithmic scales', () => {
    const frequencies = [1, 10, 100, 1000, 10_000];
    // Rises as f and falls as 1/f about 100.
    const amplitudes = [0.01, 0.1, 1, 0.1, 0.01];
    const { from, to } = bandAbove(frequencies, amplitudes, 0.1);
    expect(from).toBeCloseTo(10, 12);
    expect(to).toBeCloseTo(1000, 12);
    // Half a decade on: √10 in amplitude is √10 in frequency.
    const half = bandAbove(frequencies, amplitudes, Math.sqrt(0.1));
    expect(half.from).toBeCloseTo(100 / Math.sqrt(10), 10);
    expect(half.to).toBeCloseTo(100 * Math.sqrt(10), 10);
    expect(bandAbove(frequencies, [1, 1, 1, 1, 0.1], 0.5).from).toBeNull();
  });
});
