import { describe, expect, it } from 'vitest';
import { bandLimit, bandOf, bandStarts, type SpectralBand } from '../../src/compare/band.ts';
import { endTaper, magnitudes, spectrumOf } from '../../src/compare/spectrum.ts';
import { cos, exp, sin } from '../../src/elementary/elementary.ts';
import { fieldOf, gaussian, scaled, sum } from './synthetic.ts';

const TURN = 2 * Math.PI;

describe('spectrum', () => {
  it('of a Gaussian is a Gaussian: √(2π) σ exp(−(2πfσ)²/2)', () => {
    const [sigma, steps] = [6, 300];
    const field = fieldOf(1, steps, (_, c, t) => (c === 0 ? 3 : c === 1 ? 4 : 0) * gaussian(t, 100, sigma));
    const spectrum = spectrumOf(field, 'E', 0);
    expect(spectrum.window).toBeCloseTo(steps, 12);
    const magnitude = magnitudes(spectrum);
    for (const k of [0, 3, 10, 20]) {
      const f = k / steps;
      const expected = 5 * Math.sqrt(TURN) * sigma * exp(-((TURN * f * sigma) ** 2) / 2);
      // The trapezoidal sum of a Gaussian of 6 samples errs by exp(−2π²σ²) < 1e-300; the tails cut off are below 1e-60.
      expect(Math.abs(magnitude[k]! - expected)).toBeLessThan(steps * 8 * Number.EPSILON * 5);
    }
  });

  it('tapers the last tenth only', () => {
    const taper = endTaper(100);
    expect(taper.subarray(0, 90).every((v) => v === 1)).toBe(true);
    expect(taper[94]).toBeCloseTo(0.5, 14);
    expect(taper[99]).toBeCloseTo(0, 14);
  });
});

describe('bands', () => {
  it('hold three lines or a sixth of an octave', () => {
    const starts = bandStarts(500);
    expect(starts.slice(0, 4)).toEqual([2, 5, 8, 11]);
    starts.slice(1).forEach((k, i) => {
      expect(k - starts[i]!).toBeGreaterThanOrEqual(3);
      if (starts[i]! > 30) expect(k / starts[i]!).toBeGreaterThanOrEqual(2 ** (1 / 6));
    });
  });

  const steps = 600;
  const exact = fieldOf(1, steps, (_, c, t) => (c % 3 === 2 ? gaussian(t, 150, 8) : 0));

  it('of a field 3 % too strong have ratio 1.03, no phase, and end where the source ends', () => {
    const band = bandOf(scaled(exact, 1.03), exact, 'E', 0, 0, 0.05);
    expect(band.lowEnd).toBeCloseTo(2 / steps, 15);
    for (const { error, magnitudeRatio, phase } of band.bands) {
      expect(error).toBeCloseTo(0.03, 10);
      expect(magnitudeRatio).toBeCloseTo(1.03, 10);
      expect(Math.abs(phase)).toBeLessThan(1e-12);
    }
    expect(band.limit.status).toBe('noEnergyAbove');
    // −40 dB of exp(−(2πfσ)²/2) is at √(2 ln 100)/(2πσ); the last band that counts holds or touches it.
    const last = Math.sqrt(2 * Math.log(100)) / (TURN * 8);
    if (band.limit.status === 'noEnergyAbove') {
      expect(band.limit.frequency).toBeGreaterThan(last / 2 ** (1 / 4));
      expect(band.limit.frequency).toBeLessThan(last * 2 ** (1 / 4));
    }
  });

  it('of a delayed field err by 2 sin(πfτ) and lag by 2πfτ', () => {
    const tau = 0.7;
    const late = fieldOf(1, steps, (_, c, t) => (c % 3 === 2 ? gaussian(t - tau, 150, 8) : 0));
    const band = bandOf(late, exact, 'E', 0, 0, 0.05);
    for (const { from, to, error, phase } of band.bands) {
      // Both functions of frequency are monotone: a band's value lies between those at its ends.
      expect(error).toBeGreaterThanOrEqual(2 * sin(Math.PI * from * tau) - 1e-12);
      expect(error).toBeLessThanOrEqual(2 * sin(Math.PI * to * tau) + 1e-12);
      expect(-phase).toBeGreaterThanOrEqual(TURN * from * tau - 1e-12);
      expect(-phase).toBeLessThanOrEqual(TURN * to * tau + 1e-12);
    }
    // 5 % is reached at f = asin(0.025)/(πτ) = 0.01137: the limit is a band edge next to it.
    const crossing = Math.asin(0.025) / (Math.PI * tau);
    expect(band.limit.status).toBe('limit');
    if (band.limit.status === 'limit') {
      expect(band.limit.frequency).toBeGreaterThan(crossing - 3 / steps);
      expect(band.limit.frequency).toBeLessThan(crossing + 3 / steps);
    }
  });

  it('of a field with a wrong tone above f₀ end below f₀', () => {
    // Tones under a wide envelope: right at line 24, 20 % wrong at line 60 and above.
    const tone = (line: number, amplitude: number) =>
      fieldOf(1, steps, (_, c, t) => (c === 0 ? amplitude * cos((TURN * line * t) / steps) * gaussian(t, 270, 60) : 0));
    const right = [tone(24, 1), tone(34, 1), tone(44, 1)];
    const high = [tone(60, 1), tone(70, 1), tone(80, 1), tone(92, 1)];
    const x = sum(...right, ...high);
    const g = sum(...right, ...high.map((f) => scaled(f, 1.2)));
    const { limit } = bandOf(g, x, 'E', 0, 0, 0.05);
    expect(limit.status).toBe('limit');
    if (limit.status === 'limit') {
      expect(limit.frequency * steps).toBeGreaterThan(44);
      expect(limit.frequency * steps).toBeLessThanOrEqual(60);
    }
  });

  it('of a field with a net charge left behind are not spoilt by its static tail', () => {
    // A charge error of 2 % in a tail that the window cuts: with the taper, no band exceeds it by more than rounding.
    const step = fieldOf(1, steps, (_, c, t) => (c === 0 ? 1 / (1 + exp(-(t - 150) / 6)) : 0));
    for (const { error } of bandOf(scaled(step, 1.02), step, 'E', 0, 0, 0.05).bands)
      expect(error).toBeCloseTo(0.02, 10);
  });

  it('count only 10 dB above the floor', () => {
    // Noise of 1 V/m has √N·Δt a line; the Gaussian's largest line is √(2π)·8 = 20.05 against √600·√10 = 77.5.
    expect(bandOf(exact, exact, 'E', 0, 1, 0.05).limit.status).toBe('unmeasured');
    const low = bandOf(exact, exact, 'E', 0, 0.1, 0.05);
    const all = bandOf(exact, exact, 'E', 0, 0, 0.05);
    expect(low.bands.length).toBeGreaterThan(0);
    expect(low.bands.length).toBeLessThan(all.bands.length);
    expect(bandOf(exact, exact, 'H', 0, 0, 0.05).bands.length).toBe(all.bands.length);
    expect(
      bandOf(
        fieldOf(1, 50, () => 0),
        fieldOf(1, 50, () => 0),
        'E',
        0,
        0,
        0.05,
      ).limit.status,
    ).toBe('unmeasured');
  });
});

describe('band limit', () => {
  const bandsOf = (errors: readonly number[]): SpectralBand[] =>
    errors.map((error, i) => ({ from: i + 1, to: i + 2, error, magnitudeRatio: 1, phase: 0 }));

  it.each([
    ['two in a row set it', [1, 1, 9, 9, 1], { status: 'limit', frequency: 3 }],
    ['one alone is forgiven', [1, 9, 1, 1, 1], { status: 'noEnergyAbove', frequency: 6 }],
    ['a last failing one is not claimed', [1, 1, 1, 9], { status: 'noEnergyAbove', frequency: 4 }],
    ['the lowest two fail', [9, 9, 1, 1], { status: 'none', best: { error: 1, frequency: Math.sqrt(12) } }],
    ['a single failing band', [9], { status: 'none', best: { error: 9, frequency: Math.sqrt(2) } }],
  ])('%s', (_, errors, expected) => {
    expect(bandLimit(bandsOf(errors), 5)).toEqual(expected);
  });
});
