import { describe, expect, it } from 'vitest';
import { observerErrors, riseTime, shiftOf } from '../../src/compare/observer.ts';
import { exp } from '../../src/elementary/elementary.ts';
import { fieldOf, gaussian, scaled, sum } from './synthetic.ts';

const SIGMA = 15;
const TIME_STEP = 2e-12;
const pulse = (delay: number, amplitude = 1) =>
  fieldOf(1, 400, (_, c, t) => [0.3, -2, 0.5][c % 3]! * amplitude * gaussian(t / TIME_STEP, delay, SIGMA), TIME_STEP);
const exact = pulse(150);
const END = 1e-9; // the last arrival lies after the window's end

describe('observer figures', () => {
  it('of the exact field itself are none', () => {
    const errors = observerErrors(exact, exact, 'E', 0, END);
    expect(errors).toMatchObject({
      relativeL2: 0,
      transient: 0,
      component: 'Ey',
      peakError: 0,
      riseTimeError: 0,
      timeShift: 0,
    });
    expect(errors.amplitudeRatio).toBe(1);
    expect(errors.staticResidue).toBeNaN();
    expect(errors.exactPeak).toBe(2);
  });

  it('of a field 3 % too strong: L2, peak and amplitude 0.03, no shift, same rise', () => {
    const errors = observerErrors(scaled(exact, 1.03), exact, 'H', 0, END);
    expect(errors.component).toBe('Hy');
    expect(errors.relativeL2).toBeCloseTo(0.03, 12);
    expect(errors.peakError).toBeCloseTo(0.03, 12);
    expect(errors.amplitudeRatio).toBeCloseTo(1.03, 12);
    expect(Math.abs(errors.timeShift / TIME_STEP)).toBeLessThan(1e-10);
    expect(Math.abs(errors.riseTimeError)).toBeLessThan(1e-10);
  });

  it.each([-3.3, -0.5, 0.25, 0.499, 7.75])('of a field %d steps late: that shift, amplitude 1', (delay) => {
    const { lag, amplitudeRatio } = shiftOf(pulse(150 + delay), exact, 'E', 0);
    // The parabola's bias at a pulse of σ samples is below 1/(10 σ²) of a sample; amplitude below (1/8)(δ/σ)⁴ + that.
    expect(Math.abs(lag - delay)).toBeLessThan(1 / (10 * SIGMA * SIGMA));
    expect(Math.abs(amplitudeRatio - 1)).toBeLessThan(1 / (SIGMA * SIGMA * SIGMA * SIGMA));
  });

  it('are not drawn to zero shift by a static tail', () => {
    const tail = (delay: number) => fieldOf(1, 400, (_, c, t) => (c === 1 ? 5 / (1 + exp(-(t - delay) / 8)) : 0));
    expect(Math.abs(shiftOf(tail(154.4), tail(150), 'E', 0).lag - 4.4)).toBeLessThan(2e-3);
  });

  it('have the rise time of a Gaussian: σ (√(2 ln 10) − √(2 ln (10/9)))', () => {
    const samples = exact.values.subarray(400, 800);
    const expected = SIGMA * (Math.sqrt(2 * Math.log(10)) - Math.sqrt(2 * Math.log(10 / 9)));
    // Straight lines between samples err by at most |w″|/(8 |w′|): 1/(8 σ) (u² − 1)/u at u = 2.15, and 1.7/(8 σ) at .46.
    expect(Math.abs(riseTime(samples) - expected)).toBeLessThan(3.5 / (8 * SIGMA));
  });

  it('have a relative rise-time error: a pulse 10 % wider rises 10 % slower', () => {
    const wider = fieldOf(
      1,
      400,
      (_, c, t) => [0.3, -2, 0.5][c % 3]! * gaussian(t / TIME_STEP, 150, 1.1 * SIGMA),
      TIME_STEP,
    );
    // The straight lines' error, 3.5/(8σ), against a rise of 1.69 σ.
    expect(Math.abs(observerErrors(wider, exact, 'E', 0, END).riseTimeError - 0.1)).toBeLessThan(
      (2 * 3.5) / (8 * 1.69 * SIGMA * SIGMA),
    );
  });

  it('have no rise time where the signal starts above 10 %', () => {
    expect(riseTime(Float64Array.of(0.5, 0.8, 1))).toBeNaN();
  });

  it('report a static residue apart: 1 % on the pulse, 4 % on the charge left behind', () => {
    const charge = (amplitude: number) =>
      fieldOf(1, 400, (_, c, t) => (c === 2 && t > 250.5 * TIME_STEP ? amplitude : 0), TIME_STEP);
    const x = sum(exact, charge(0.2));
    const g = sum(scaled(exact, 1.01), charge(0.2 * 1.04));
    const errors = observerErrors(g, x, 'E', 0, 250.2 * TIME_STEP);
    expect(errors.transient).toBeCloseTo(0.01, 10);
    // The pulse's own tail 100 steps (6.7 σ) after its peak is 2e-10 of it.
    expect(errors.staticResidue).toBeCloseTo(0.04, 8);
    expect(errors.relativeL2).toBeGreaterThan(0.01);
    expect(errors.relativeL2).toBeLessThan(0.04);
  });
});
