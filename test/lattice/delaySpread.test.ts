import { describe, expect, test } from 'vitest';
import { DelaySpread } from '../../src/lattice/delaySpread.ts';
import { makeWaveform } from '../../src/scenario/waveforms.ts';

describe('histories by delay spreading', () => {
  /** Largest error of each derivative, relative to its own peak, over delays that fall anywhere between bins. */
  function worstErrors(stepsPerSigma: number): number[] {
    // Nine sigma before the peak there is no jump left at t = 0 that would be spread.
    const waveform = makeWaveform({ type: 'gaussian', amplitude: 1, delay: 9, sigma: 1 });
    const step = 1 / stepsPerSigma;
    const count = Math.ceil(18 / step);
    const direct = new Float64Array(6);
    return Array.from({ length: 6 }, (_, k) => {
      const coefficients = new Float64Array(6);
      coefficients[k] = 1;
      const spread = new DelaySpread([waveform], 0.5 * step, 1, count, step, [0, 2]);
      let error = 0;
      let peak = 0;
      for (const delay of [0, 0.3 * step, 0.5 * step, 7.77 * step, 2]) {
        const out = new Float64Array(count);
        spread.clear();
        spread.add(0, delay, 1, coefficients);
        spread.addHistory(out, 0);
        for (let n = 0; n < count; n++) {
          waveform.at((n + 0.5) * step - delay, 5, direct);
          error = Math.max(error, Math.abs(out[n]! - direct[k]!));
          peak = Math.max(peak, Math.abs(direct[k]!));
        }
      }
      return error / peak;
    });
  }

  test('ten points: order 10, as good as promised at 8 steps a sigma', () => {
    const steps = [4, 8, 16];
    const errors = steps.map(worstErrors);
    console.table(
      errors.map((row, i) => ({
        'steps a sigma': steps[i],
        ...Object.fromEntries(['q', 'w', 'w1', 'w2', 'w3', 'w4'].map((name, k) => [name, row[k]!.toExponential(1)])),
      })),
    );
    expect(errors[1]![1]).toBeLessThan(1e-9);
    expect(errors[1]![5]).toBeLessThan(2e-8);
    for (const coarse of [0, 1]) {
      const order = Math.log2(errors[coarse]![5]! / errors[coarse + 1]![5]!);
      // The next order still shows at 4 steps a sigma.
      expect(order).toBeGreaterThan(9.5);
      expect(order).toBeLessThan(10.2);
    }
  });

  test('sums terms of several waveforms, at every third instant, and forgets them', () => {
    const waveforms = [
      makeWaveform({ type: 'gaussian', amplitude: 2, delay: 9, sigma: 1 }),
      makeWaveform({ type: 'gaussianDerivative', amplitude: -1, delay: 14, sigma: 1.5 }),
    ];
    const step = 1 / 16;
    const spread = new DelaySpread(waveforms, 10 * step, 3, 100, step, [-1, 4]);
    const coefficients = Float64Array.of(0.5, -1, 2, 0.25, -0.125, 0.1);
    spread.add(0, 1, 99, coefficients);
    spread.clear();
    const terms: [number, number, number][] = [
      [0, -1, 2],
      [1, 0.123, -3],
      [0, 3.9, 1],
    ];
    for (const [waveform, delay, weight] of terms) spread.add(waveform, delay, weight, coefficients);
    const out = new Float64Array(101);
    spread.addHistory(out, 1);
    expect(out[0]).toBe(0);
    const at = new Float64Array(6);
    for (let n = 0; n < 100; n++) {
      let sum = 0;
      for (const [waveform, delay, weight] of terms) {
        waveforms[waveform]!.at((10 + 3 * n) * step - delay, 5, at);
        sum += weight * coefficients.reduce((s, c, k) => s + c * at[k]!, 0);
      }
      // 10⁻¹¹ of each derivative at 16 steps a sigma; the sums are of order 10.
      expect(Math.abs(out[n + 1]! - sum)).toBeLessThan(1e-10);
    }
  });
});
