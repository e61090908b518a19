import type { Waveform } from '../scenario/waveform.ts';
import { SIX } from './radialOperator.ts';

/** Points of the Lagrange rule that places a delay on the grid; its middle interval holds the delay. */
const POINTS = 10;
const BEFORE = POINTS / 2 - 1;

/** 1/Π_{k≠m} (m − k) */
const LAGRANGE = Float64Array.from({ length: POINTS }, (_, m) => {
  let product = 1;
  for (let k = 0; k < POINTS; k++) if (k !== m) product *= m - k;
  return 1 / product;
});

/**
 * Histories of sums of delayed waveforms, Σ coefficient · w^(k)(t − τ), at evenly spaced instants. Every term spreads its
 * coefficients over a grid of delays with Lagrange weights; one convolution with the sampled waveforms ends the sum, so
 * the waveforms are looked up once for all terms. With 10 points and a Gaussian of sigma 8 steps the spreading is off by
 * 2·10⁻¹⁰ of w's peak and 10⁻⁸ of w⁗'s, and by a thousandth of that at 16 steps.
 */
export class DelaySpread {
  readonly #step: number;
  readonly #every: number;
  readonly #count: number;
  /** delay of the first bin, in steps */
  readonly #first: number;
  readonly #bins: number;
  /** [waveform · 6 + k + 1][bin] */
  readonly #spread: readonly Float64Array[];
  /** [waveform · 6 + k + 1][i]: the k-th derivative at instant 0 + (i − #bins + 1 − #first) steps */
  readonly #samples: readonly Float64Array[];
  readonly #weights = new Float64Array(POINTS);
  #lower = 0;
  #upper = 0;

  /**
   * @param waveforms that delays refer to
   * @param start first instant, s
   * @param every instants are this many steps apart
   * @param step grid of delays, s
   * @param delays least and greatest delay to come, s
   */
  constructor(
    waveforms: readonly Waveform[],
    start: number,
    every: number,
    count: number,
    step: number,
    delays: readonly [number, number],
  ) {
    this.#step = step;
    this.#every = every;
    this.#count = count;
    this.#first = Math.floor(delays[0] / step) - BEFORE;
    this.#bins = Math.floor(delays[1] / step) - this.#first + POINTS;
    this.#spread = Array.from({ length: SIX * waveforms.length }, () => new Float64Array(this.#bins));
    const length = (count - 1) * every + this.#bins;
    const samples = this.#spread.map(() => new Float64Array(length));
    const at = new Float64Array(SIX);
    waveforms.forEach((waveform, index) => {
      for (let i = 0; i < length; i++) {
        waveform.at(start + (i - this.#bins + 1 - this.#first) * step, SIX - 1, at);
        for (let k = 0; k < SIX; k++) samples[index * SIX + k]![i] = at[k]!;
      }
    });
    this.#samples = samples;
    this.clear();
  }

  /** Forgets the terms added so far. */
  clear(): void {
    for (const bins of this.#spread) bins.fill(0, this.#lower, this.#upper);
    this.#lower = this.#bins;
    this.#upper = 0;
  }

  /** Adds Σ_k weight · coefficients[k + 1] · w^(k)(t − delay), k = −1 … 4. */
  add(waveform: number, delay: number, weight: number, coefficients: Float64Array): void {
    const steps = delay / this.#step;
    const floor = Math.floor(steps);
    const bin = floor - BEFORE - this.#first;
    this.#lagrange(steps - floor + BEFORE);
    for (let k = 0; k < SIX; k++) {
      const value = weight * coefficients[k]!;
      if (value === 0) continue;
      const bins = this.#spread[waveform * SIX + k]!;
      for (let m = 0; m < POINTS; m++) bins[bin + m]! += value * this.#weights[m]!;
    }
    if (bin < this.#lower) this.#lower = bin;
    if (bin + POINTS > this.#upper) this.#upper = bin + POINTS;
  }

  /** Lagrange weights of the integers 0 … POINTS − 1 at x. */
  #lagrange(x: number): void {
    for (let m = 0; m < POINTS; m++) {
      let weight = LAGRANGE[m]!;
      for (let k = 0; k < POINTS; k++) if (k !== m) weight *= x - k;
      this.#weights[m] = weight;
    }
  }

  /** Adds the history of the terms added to out[offset + n], n = 0 … count − 1. */
  addHistory(out: Float64Array, offset: number): void {
    for (let row = 0; row < this.#spread.length; row++) {
      const bins = this.#spread[row]!;
      const samples = this.#samples[row]!;
      for (let bin = this.#lower; bin < this.#upper; bin++) {
        const value = bins[bin]!;
        if (value === 0) continue;
        let i = this.#bins - 1 - bin;
        for (let n = 0; n < this.#count; n++) {
          out[offset + n]! += value * samples[i]!;
          i += this.#every;
        }
      }
    }
  }
}
